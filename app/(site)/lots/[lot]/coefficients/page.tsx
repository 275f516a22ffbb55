import type { Metadata } from "next";
import Link from "next/link";
import { LinkButton } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { LotThread } from "@/app/_components/lot-thread";
import { DataTable } from "@/app/_components/table/data-table";
import { TitleRow } from "@/app/_components/title-row";
import { formatDate } from "@/lib/domain/format/time";
import { holds, orNotFound, pageContext } from "@/lib/http/page-context";
import type { PersonCtx } from "@/lib/services/context";
import { getDerivationView, listLotDerivations } from "@/lib/services/derivations/get-derivation";
import { getLotThread } from "@/lib/services/lots/get-lot-thread";
import { getRulesOfLot } from "@/lib/services/lots/lot-rules";
import { listLotRuns } from "@/lib/services/runs/get-run";
import { DeriveForm } from "./derive-form";
import { type LikeDerivation, likeOf } from "./derive-options";
import { ImportPanel } from "./import-panel";

export const metadata: Metadata = { title: "Coefficients" };

interface PageProps {
  params: Promise<{ lot: string }>;
  /** `like`: a derivation whose options are carried over. `exclude`: serials to leave out besides. */
  searchParams: Promise<{ like?: string; exclude?: string }>;
}

/** The derivation that the form starts from, if it is one of the lot. */
async function findLike(ctx: PersonCtx, lot: string, id: string | undefined): Promise<LikeDerivation | undefined> {
  if (!id) return undefined;
  const view = await orNotFound(getDerivationView(ctx, id));
  return view.lot === lot ? likeOf(view, `Derivation of ${formatDate(view.createdAt)}`) : undefined;
}

export default async function CoefficientsPage({ params, searchParams }: PageProps) {
  const ctx = await pageContext();
  const asked = await searchParams;
  const thread = await orNotFound(getLotThread(ctx, decodeURIComponent((await params).lot)));
  const { lot } = thread;
  const derivations = (await listLotDerivations(ctx, lot, { limit: 1_000 })).items;
  const isEngineer = holds(ctx, "engineer");
  const runs = isEngineer ? (await listLotRuns(ctx, lot, { limit: 1_000 })).items : [];
  const { referenceC, capacityKg } = await getRulesOfLot(ctx, lot);
  const sets = `/api/v1/lots/${encodeURIComponent(lot)}/coefficients`;
  return (
    <>
      <TitleRow
        breadcrumb={[{ name: "Lots", href: "/lots" }, { name: lot, href: `/lots/${lot}` }, { name: "Coefficients" }]}
        title={`Coefficients of ${lot}`}
        note="Derived from readings, decided by a second person, then packed"
        actions={<LinkButton href={`/lots/${lot}/packages`}>Packages</LinkButton>}
      />
      <LotThread thread={thread} current="coefficients" />
      <div className="flex flex-col gap-[18px]">
        {isEngineer ? (
          <DeriveForm
            key={`${asked.like} ${asked.exclude}`}
            lot={lot}
            like={await findLike(ctx, lot, asked.like)}
            exclude={(asked.exclude ?? "").split(",").filter(Boolean)}
            runs={runs
              .filter((run) => run.supersededBy === null && run.purpose !== "proof")
              .map(({ id, purpose, createdAt, devices, temperatureLowC, temperatureHighC }) => ({
                id,
                purpose,
                createdAt,
                devices,
                temperatureLowC,
                temperatureHighC,
              }))}
          />
        ) : null}
        <Card title="Derivations and imports">
          <DataTable
            name="derivations"
            urlName="derivations"
            rows={derivations}
            rowKey="id"
            rowHref="/derivations/{id}"
            columns={[
              { key: "createdAt", header: "Made", format: { as: "time" } },
              { key: "method", header: "Method" },
              { key: "order", header: "Order", format: { as: "count" } },
              { key: "state", header: "State", format: { as: "state", kind: "derivation" } },
              { key: "devices", header: "Devices", format: { as: "count" } },
              { key: "withValues", header: "With values", format: { as: "count" } },
              { key: "findings.hard", header: "Blocking", unit: "findings", format: { as: "count" } },
              { key: "findings.soft", header: "To acknowledge", unit: "findings", format: { as: "count" } },
              { key: "createdBy", header: "By" },
              { key: "sha256", header: "Digest", format: { as: "digest" }, hidden: true },
            ]}
            chips={[{ id: "open", name: "Waiting", key: "state", in: ["working", "proposed"] }]}
            empty={{
              title: "Nothing derived yet",
              text: isEngineer
                ? "Choose method, order and runs above; a preview shows the result before anything is stored."
                : "An engineer derives coefficients from the lot's readings here.",
            }}
          />
        </Card>
        <Card title="Newest coefficients of each device">
          <DataTable
            name={`coefficients of ${lot}`}
            urlName="sets"
            endpoint={sets}
            rowKey="serial"
            rowHref="/trace/{serial}"
            columns={[
              { key: "serial", header: "Serial", format: { as: "code" } },
              { key: "state", header: "State", format: { as: "state", kind: "coefficient-set" } },
              { key: "role", header: "Role" },
              { key: "coefficients.gainTc", header: "gainTc", format: { as: "quantity", name: "gainTc" } },
              { key: "coefficients.zeroTc", header: "zeroTc", format: { as: "quantity", name: "zeroTc" } },
              { key: "coefficients.zero", header: "zero", format: { as: "quantity", name: "zero" } },
              { key: "coefficients.gain", header: "gain", format: { as: "quantity", name: "gain" } },
              {
                key: "coefficients.gainTc2",
                header: "gainTc2",
                format: { as: "quantity", name: "gainTc2" },
                hidden: true,
              },
              {
                key: "coefficients.zeroTc2",
                header: "zeroTc2",
                format: { as: "quantity", name: "zeroTc2" },
                hidden: true,
              },
              {
                key: "coefficients.tempOffset",
                header: "tempOffset",
                format: { as: "quantity", name: "tempOffset" },
                hidden: true,
              },
              {
                key: "coefficients.tempSlope",
                header: "tempSlope",
                format: { as: "quantity", name: "tempSlope" },
                hidden: true,
              },
              { key: "method", header: "Method" },
              { key: "derivedAt", header: "Derived", format: { as: "time" } },
            ]}
            chips={[
              { id: "approved", name: "Approved", key: "state", in: ["approved"] },
              { id: "proposed", name: "Proposed", key: "state", in: ["proposed"] },
              { id: "void", name: "Stale, refused, revoked", key: "state", in: ["stale", "refused", "revoked"] },
            ]}
            empty={{
              title: "No device has coefficients yet",
              text: (
                <>
                  They come from a derivation of <Link href={`/lots/${lot}/readings`}>readings</Link>, or by import.
                </>
              ),
            }}
          />
        </Card>
        {isEngineer ? <ImportPanel lot={lot} referenceC={referenceC} capacityKg={capacityKg} /> : null}
      </div>
    </>
  );
}
