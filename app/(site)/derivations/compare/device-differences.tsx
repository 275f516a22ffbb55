"use client";

import { useMemo } from "react";
import { Card } from "@/app/_components/card";
import { Facts } from "@/app/_components/facts";
import { StateMark } from "@/app/_components/state/state-mark";
import type { DataColumn, Row } from "@/app/_components/table/column";
import { DataTable } from "@/app/_components/table/data-table";
import type { CoefficientName } from "@/lib/domain/format/coefficient-units";
import { formatCount, formatFigure, formatNumberOf } from "@/lib/domain/format/figure";
import { COEFFICIENT_QUANTITIES, type QuantityName } from "@/lib/domain/format/quantity";
import type { ComparedSet, DerivationComparison } from "@/schemas/api/derivation-comparison";

export interface DeviceDifferencesProps extends Pick<DerivationComparison, "rangeC" | "counts" | "largestEffectV"> {
  from: string;
  to: string;
}

const marks = {
  values: { tone: "info", word: "other values" },
  added: { tone: "good", word: "added" },
  removed: { tone: "caution", word: "removed" },
} as const;

/** Coefficients by name, so that each can have its column; `owner` is the derivation that has the device. */
function rowOf(row: Row, from: string, to: string): Row {
  const set = row as unknown as ComparedSet;
  const named = (member: "from" | "to" | "step") =>
    Object.fromEntries(set.coefficients.map((one) => [one.name, one[member]]));
  return {
    ...row,
    was: named("from"),
    is: named("to"),
    step: named("step"),
    role: set.role.to ?? set.role.from,
    owner: set.change === "removed" ? from : to,
  };
}

/** A step of gain is read in ppm, all others in their own unit. */
const stepName = (name: CoefficientName): QuantityName => (name === "gain" ? "relativeStep" : name);

const SHOWN = new Set<string>(["gain", "gainTc", "zero", "zeroTc"]);

const columns: DataColumn[] = [
  { key: "serial", header: "Serial", format: { as: "code" } },
  { key: "role", header: "Role" },
  { key: "change", header: "Change", cell: (row) => <StateMark {...marks[row.change as keyof typeof marks]} /> },
  {
    key: "effectV",
    header: "effect at capacity",
    unit: "v",
    title: "What the reading at capacity changes by where it changes most",
    format: { as: "figure", digits: 3, sign: "always" },
  },
  { key: "effectAtC", header: "at", unit: "°C", format: { as: "figure", digits: 1 } },
  ...COEFFICIENT_QUANTITIES.map(
    (name): DataColumn => ({
      key: `step.${name}`,
      header: `${name} step`,
      format: { as: "quantity", name: stepName(name), sign: "always" },
      hidden: !SHOWN.has(name),
    }),
  ),
  ...COEFFICIENT_QUANTITIES.flatMap((name): DataColumn[] => [
    { key: `was.${name}`, header: `${name} from`, format: { as: "quantity", name }, hidden: true },
    { key: `is.${name}`, header: `${name} to`, format: { as: "quantity", name }, hidden: true },
  ]),
];

/** Device by device what differs, largest effect first; added and removed devices after them. */
export function DeviceDifferences({ from, to, rangeC, counts, largestEffectV }: DeviceDifferencesProps) {
  const compared = counts.values + counts.same;
  const toRow = useMemo(() => (row: Row) => rowOf(row, from, to), [from, to]);
  return (
    <Card
      title="Devices"
      note={`Effect at capacity over ${formatFigure(rangeC[0], { digits: 2 })} to ${formatFigure(rangeC[1], { digits: 2 })} °C, largest first`}
    >
      <div className="mb-4">
        <Facts
          facts={[
            { value: formatCount(counts.values), label: `of ${formatNumberOf(compared, "device")} get other values` },
            {
              value: largestEffectV === null ? "—" : formatFigure(largestEffectV, { digits: 3, sign: "always" }),
              label: "v, the largest effect at capacity",
            },
            { value: formatCount(counts.added), label: "added" },
            { value: formatCount(counts.removed), label: "removed" },
          ]}
        />
      </div>
      <DataTable
        name="differences of coefficients"
        urlName="devices"
        endpoint={`/api/v1/derivations/compare?from=${from}&to=${to}`}
        rowKey="serial"
        rowHref="/derivations/{owner}/{serial}"
        toRow={toRow}
        columns={columns}
        chips={[
          { id: "values", name: "Other values", key: "change", in: ["values"] },
          { id: "added", name: "Added", key: "change", in: ["added"] },
          { id: "removed", name: "Removed", key: "change", in: ["removed"] },
        ]}
        empty={{ title: "No device differs", text: "Both give every device the same coefficients." }}
      />
    </Card>
  );
}
