"use client";

import Link from "next/link";
import { useRouter } from "next/navigation";
import { useState } from "react";
import { Button } from "@/app/_components/button";
import { ConfirmDialog } from "@/app/_components/confirm-dialog";
import { StateMark } from "@/app/_components/state/state-mark";
import { stateOf } from "@/app/_components/state/state-of";
import { useToast } from "@/app/_components/toast";
import { formatNumberOf } from "@/lib/domain/format/figure";
import type { LayoutSummary } from "@/lib/services/layouts/get-layout";
import type { LayoutUse } from "@/lib/services/layouts/get-layout-use";
import { retireLayoutAction } from "./layout-actions";
import { RetireWarning } from "./layout-uses";

interface LayoutWithUses {
  layout: LayoutSummary;
  uses: readonly LayoutUse[];
}

interface LayoutTableProps {
  family: string;
  rows: readonly LayoutWithUses[];
  /** The person may retire layouts. */
  mayRetire: boolean;
}

/** Versions with their firmware, the lots and packages that use each, and the way to retire one. */
export function LayoutTable({ family, rows, mayRetire }: LayoutTableProps) {
  const router = useRouter();
  const tell = useToast();
  const [retiring, setRetiring] = useState<LayoutWithUses>();
  const retire = async (reason: string | undefined) => {
    const version = retiring?.layout.version ?? "";
    const result = await retireLayoutAction({ code: family, version }, reason);
    if (!result.ok) return result.problem;
    tell({ tone: "good", title: `Layout ${version} retired` });
    router.refresh();
    return null;
  };
  return (
    <div className="relative overflow-x-auto">
      <table className="w-full text-sm">
        <thead>
          <tr className="border-b border-rule text-left">
            {["Layout", "State", "Firmware", "Used by"].map((name) => (
              <th key={name} scope="col" className="py-1.5 pr-3 font-semibold">
                {name}
              </th>
            ))}
            {mayRetire ? (
              <td>
                <span className="sr-only">Retire</span>
              </td>
            ) : null}
          </tr>
        </thead>
        <tbody>
          {rows.map((row) => (
            <tr key={row.layout.id} className="border-b border-rule/55 align-baseline last:border-0">
              <th scope="row" className="py-2 pr-3 text-left font-mono font-normal">
                <Link href={`/families/${family}/layouts/${row.layout.version}`}>{row.layout.version}</Link>
              </th>
              <td className="pr-3">
                <StateMark {...stateOf("layout", row.layout.state)} />
              </td>
              <td className="pr-3 font-mono whitespace-nowrap">{row.layout.firmware}</td>
              <td className="pr-3">
                <UseList uses={row.uses} />
              </td>
              {mayRetire ? (
                <td className="py-1.5 text-right">
                  {row.layout.state === "published" ? (
                    <Button onClick={() => setRetiring(row)}>Retire {row.layout.version}</Button>
                  ) : null}
                </td>
              ) : null}
            </tr>
          ))}
        </tbody>
      </table>
      {retiring ? (
        <ConfirmDialog
          open
          onOpenChange={(open) => open || setRetiring(undefined)}
          danger
          title={`Retire layout ${retiring.layout.version}`}
          description={<RetireWarning uses={retiring.uses} />}
          confirm="Retire it"
          reason="optional"
          onConfirm={({ reason }) => retire(reason)}
        />
      ) : null}
    </div>
  );
}

function UseList({ uses }: { uses: readonly LayoutUse[] }) {
  if (uses.length === 0) return <span className="text-ink-soft">nothing built from it</span>;
  const packages = uses.reduce((sum, use) => sum + use.packages, 0);
  return (
    <>
      <span className="block">
        {formatNumberOf(uses.length, "lot")}, {formatNumberOf(packages, "package")}
      </span>
      {uses.slice(0, 6).map(({ lot, live }) => (
        <span key={lot} className="mr-3 inline-block whitespace-nowrap">
          <Link href={`/lots/${lot}/packages`} className="font-mono">
            {lot}
          </Link>
          {live ? (
            <>
              {" live "}
              <Link href={`/packages/${live.id}`} className="font-mono">
                {live.version}
              </Link>
            </>
          ) : null}
        </span>
      ))}
      {uses.length > 6 ? <span className="text-ink-soft">and {uses.length - 6} more</span> : null}
    </>
  );
}
