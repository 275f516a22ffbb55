"use client";

import Link from "next/link";
import { useRouter } from "next/navigation";
import { useState } from "react";
import { Button } from "@/app/_components/button";
import { type Confirmation, ConfirmDialog } from "@/app/_components/confirm-dialog";
import { SealMark } from "@/app/_components/seal-mark";
import type { Row } from "@/app/_components/table/column";
import { DataTable } from "@/app/_components/table/data-table";
import { useToast } from "@/app/_components/toast";
import type { PackageSummary } from "@/schemas/api/packages";
import { askReinstatementAction } from "../../../packages/actions";

export interface PackagesTableProps {
  lot: string;
  rows: readonly PackageSummary[];
  /** An earlier release can be asked for. */
  mayAsk: boolean;
  oneTimeCode: boolean;
  engineer: boolean;
}

const summaryOf = (row: Row) => row as unknown as PackageSummary;

/** A lot's packages, newest first, with their seals; earlier releases can be asked for again. */
export function PackagesTable({ lot, rows, mayAsk, oneTimeCode, engineer }: PackagesTableProps) {
  const router = useRouter();
  const tell = useToast();
  const [asked, setAsked] = useState<PackageSummary>();

  const ask = async (values: Confirmation) => {
    if (!asked) return null;
    const result = await askReinstatementAction(lot, { ...values, package: asked.id });
    if (!result.ok) return result.problem;
    tell({ tone: "good", title: `Reinstatement of ${asked.version} waits for a second person` });
    router.refresh();
    return null;
  };

  return (
    <>
      <DataTable
        name={`packages of ${lot}`}
        rows={rows as unknown as Row[]}
        rowKey="id"
        rowHref="/packages/{id}"
        columns={[
          { key: "version", header: "Version", format: { as: "code" } },
          { key: "state", header: "State", format: { as: "state", kind: "package" } },
          {
            key: "digest",
            header: "Seal",
            sortable: false,
            cell: (row) => {
              const { digest } = summaryOf(row);
              return digest ? <SealMark digest={digest} look="inline" /> : null;
            },
          },
          { key: "counts.devices", header: "Devices", format: { as: "count" } },
          { key: "layout", header: "Layout", format: { as: "code" } },
          {
            key: "checks.pass",
            header: "Checks",
            title: "Passed, warned, failed",
            cell: (row) => checksText(summaryOf(row)),
          },
          {
            key: "sequence",
            header: "Sequence",
            title: "Of the newest change of what is live that names it",
            format: { as: "count" },
          },
          { key: "createdBy", header: "Built by" },
          { key: "createdAt", header: "Built", format: { as: "time" } },
          { key: "firmware", header: "Firmware", format: { as: "code" }, hidden: true },
          { key: "notes", header: "Notes", hidden: true },
          ...(mayAsk && rows.some((row) => row.state === "superseded")
            ? [
                {
                  key: "id",
                  header: "Go back",
                  sortable: false,
                  cell: (row: Row) =>
                    summaryOf(row).state === "superseded" ? (
                      <button
                        type="button"
                        onClick={() => setAsked(summaryOf(row))}
                        className="text-slate underline underline-offset-3 hover:text-copper-strong"
                      >
                        ask for it
                      </button>
                    ) : null,
                },
              ]
            : []),
        ]}
        chips={[
          { id: "open", name: "In work", key: "state", in: ["building", "draft", "in-review", "approved"] },
          { id: "released", name: "Released", key: "state", in: ["live", "superseded", "withdrawn"] },
          { id: "ended", name: "Failed or refused", key: "state", in: ["failed", "refused"] },
        ]}
        empty={{
          title: "No package yet",
          text: engineer ? (
            <>
              Once <Link href={`/lots/${encodeURIComponent(lot)}/coefficients`}>coefficients</Link> are approved, build
              one below.
            </>
          ) : (
            "An engineer builds one once coefficients are approved."
          ),
          action: engineer ? <Button onClick={() => router.push("#build")}>Build a package</Button> : undefined,
        }}
      />
      <ConfirmDialog
        open={asked !== undefined}
        onOpenChange={(open) => !open && setAsked(undefined)}
        title={`Ask to make release ${asked?.version ?? ""} live again`}
        description="A reviewer other than you decides. Devices that carry other values than this release then stand on the re-write list."
        confirm="Ask for reinstatement"
        reason="required"
        password
        oneTimeCode={oneTimeCode}
        onConfirm={ask}
      />
    </>
  );
}

function checksText({ checks }: PackageSummary): string {
  const parts = [
    checks.pass > 0 ? `${checks.pass} pass` : "",
    checks.warn > 0 ? `${checks.warn} warn` : "",
    checks.fail > 0 ? `${checks.fail} fail` : "",
  ];
  return parts.filter(Boolean).join(", ");
}
