"use client";

import { useMemo } from "react";
import {
  type ComparedField,
  changeMarks,
  columnsOfField,
  rowOfChange,
} from "@/app/_components/difference/changed-device";
import { StateMark } from "@/app/_components/state/state-mark";
import { type DataColumn, type Row, textOf, valueAt } from "@/app/_components/table/column";
import { DataTable } from "@/app/_components/table/data-table";
import type { FieldChangeText } from "@/lib/domain/format/field-value";

export interface DifferenceTableProps {
  /** API list of the changed serials, as `/api/v1/compare?from=&to=`. */
  endpoint: string;
  fields: readonly ComparedField[];
  /** Serial whose bytes are shown beside the table. */
  opened?: string;
  onOpen?: (row: Row) => void;
}

/** Every serial that differs between two packages, with each value old → new. */
export function DifferenceTable({ endpoint, fields, opened, onOpen }: DifferenceTableProps) {
  const columns = useMemo<DataColumn[]>(
    () => [
      { key: "serial", header: "Serial", format: { as: "code" } },
      {
        key: "change",
        header: "Change",
        cell: (row) => <StateMark {...changeMarks[row.change as keyof typeof changeMarks]} />,
      },
      ...fields.flatMap(columnsOfField).map(withCell),
      { key: "bytesChanged", header: "bytes", format: { as: "count" }, title: "How many bytes differ" },
    ],
    [fields],
  );
  const toRow = useMemo(() => {
    const least = new Map(
      fields.flatMap((field) => (field.least === undefined ? [] : [[field.name, field.least] as const])),
    );
    return (item: Row) => rowOfChange(item, least);
  }, [fields]);
  return (
    <DataTable
      name="changed serials"
      urlName="changes"
      endpoint={endpoint}
      rowKey="serial"
      toRow={toRow}
      columns={columns}
      opened={opened}
      onOpen={onOpen}
      chips={[
        { id: "values", name: "Other values", key: "change", in: ["values"] },
        { id: "version-only", name: "Version only", key: "change", in: ["version-only"] },
        { id: "added", name: "Added", key: "change", in: ["added"] },
        { id: "removed", name: "Removed", key: "change", in: ["removed"] },
      ]}
      empty={{ title: "No serial differs", text: "Both hold the same bytes for the same serials." }}
    />
  );
}

/** Old values are set back; a step shows as many decimals as it has. */
function withCell(column: DataColumn): DataColumn {
  const [, name, member] = column.key.split(".");
  const textAt = (row: Row) => valueAt(row, `values.${name}.text`) as FieldChangeText | undefined;
  if (member === "shown") {
    return {
      ...column,
      cell: (row) => {
        const text = textAt(row);
        if (!text) return null;
        return (
          <>
            <span className="text-ink-soft">{text.from ?? "none"}</span> → {text.to ?? "none"}
          </>
        );
      },
    };
  }
  if (member === "step") {
    return { ...column, cell: (row) => textAt(row)?.step?.split(" ")[0] ?? (textAt(row) ? "" : null) };
  }
  if (member === "steps") return { ...column, cell: (row) => (textAt(row) ? textOf(column, row) : null) };
  return column;
}
