"use client";

import { useMemo } from "react";
import { Card } from "@/app/_components/card";
import { DataTable } from "@/app/_components/table/data-table";
import { formatNumberOf } from "@/lib/domain/format/figure";
import type { DerivationView } from "@/schemas/api/derivations";
import { deviceChips, deviceColumns, withErrorV } from "./device-columns";
import { useSelection } from "./selection";

export interface DevicesCardProps {
  view: Pick<DerivationView, "id" | "order" | "method" | "counts">;
  intervals: number;
  /** Some fits pass through all their points. */
  noFreedom: boolean;
  /** Who asks may decide over the devices, and so select them. */
  selectable: boolean;
}

/** Every device of a derivation with its values, its error, its findings and its state. */
export function DevicesCard({ view, intervals, noFreedom, selectable }: DevicesCardProps) {
  const { serials, setSerials } = useSelection();
  const { id, order, method, counts } = view;
  const columns = useMemo(
    () => deviceColumns({ order, intervals, isPooled: method === "pooled-gain", isImport: method === "import" }),
    [order, intervals, method],
  );
  const toRow = useMemo(() => (row: Record<string, unknown>) => withErrorV(row, intervals), [intervals]);
  const few = order === 1 ? "Two temperatures" : "Three temperatures";
  const path = `/api/v1/derivations/${id}/devices`;
  return (
    <Card
      title="Devices"
      note={selectable && serials.size > 0 ? `${formatNumberOf(serials.size, "device")} selected` : undefined}
      aside={
        <span className="print:hidden">
          All columns, full precision:{" "}
          <a href={`${path}?format=csv`} download>
            CSV
          </a>{" "}
          ·{" "}
          <a href={`${path}?format=xlsx`} download>
            XLSX
          </a>
        </span>
      }
    >
      <DataTable
        name="devices"
        urlName="devices"
        endpoint={path}
        total={counts.devices}
        rowKey="serial"
        rowHref={`/derivations/${id}/{serial}`}
        toRow={toRow}
        columns={columns}
        chips={deviceChips(counts)}
        note={
          noFreedom
            ? `${few} leave no degree of freedom: the fit passes through all points, and no error is stated.`
            : "± is one standard error."
        }
        {...(selectable && { selected: serials, onSelected: setSerials })}
        empty={{ title: "No device", text: "The runs named no device." }}
      />
    </Card>
  );
}
