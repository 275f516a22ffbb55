import type { Metadata } from "next";
import Link from "next/link";
import { Card } from "@/app/_components/card";
import { Digest } from "@/app/_components/digest";
import { Facts } from "@/app/_components/facts";
import { formatCount } from "@/lib/domain/format/figure";
import { pageContext } from "@/lib/http/page-context";
import { getLayout } from "@/lib/services/layouts/get-layout";
import type { PackageView } from "@/schemas/api/packages";
import type { LayoutDocument } from "@/schemas/documents/layout";
import { leftOutWords } from "../left-out-words";
import { contentFields } from "./content-fields";
import { ContentsTable } from "./contents-table";
import { loadPackage, type PackageParams } from "./load-package";
import { PackageShell } from "./package-shell";

export const metadata: Metadata = { title: "Package" };

export default async function PackagePage({ params }: PackageParams) {
  const ctx = await pageContext();
  const view = await loadPackage(ctx, params);
  const layout = await getLayout(ctx, { family: view.family, version: view.layout });
  return (
    <PackageShell ctx={ctx} view={view} tab="contents">
      <Summary view={view} />
      <Card title="Images" note="Values as decoded from the bytes; open one for its memory map">
        <ContentsTable
          id={view.id}
          devices={view.counts.devices}
          fields={contentFields(layout.document as unknown as LayoutDocument)}
        />
      </Card>
    </PackageShell>
  );
}

function Summary({ view }: { view: PackageView }) {
  const { devices, lotDevices, leftOut } = view.counts;
  const reasons = Object.entries(leftOut).filter(([, count]) => count > 0);
  return (
    <Card>
      <div className="flex flex-col gap-3">
        <Facts
          facts={[
            { value: `${formatCount(devices)} of ${formatCount(lotDevices)}`, label: "devices of the lot packed" },
            {
              value: <Link href={`/families/${view.family}/layouts/${view.layout}`}>{view.layout}</Link>,
              label: `layout of ${view.family}, revision ${view.revision}`,
            },
            { value: view.firmware, label: "firmware" },
            {
              value: (
                <Link href={`/packages/${view.id}/checks`}>
                  {view.checks.filter((check) => check.verdict === "pass").length} of {view.checks.length}
                </Link>
              ),
              label: "checks pass",
            },
          ]}
        />
        {reasons.length > 0 ? (
          <p className="text-sm">
            Left out:{" "}
            {reasons.map(([reason, count]) => `${formatCount(count)} ${leftOutWords[reason] ?? reason}`).join("; ")}.
          </p>
        ) : null}
        {view.notes ? <p className="text-sm whitespace-pre-line">Notes: {view.notes}</p> : null}
        {view.digest ? <Digest value={view.digest} name="package digest" /> : null}
      </div>
    </Card>
  );
}
