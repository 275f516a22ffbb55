"use client";

import { type ComparedField, changeMarks, columnsOfField } from "@/app/_components/difference/changed-device";
import { StateMark } from "@/app/_components/state/state-mark";
import { type DataColumn, type Row, textOf, valueAt } from "@/app/_components/table/column";
import type { FieldChangeText } from "@/lib/domain/format/field-value";

/** Columns of a comparison: the serial, what kind of change it is, each field old → new with its step, bytes. */
export function differenceColumns(fields: readonly ComparedField[]): DataColumn[] {
  return [
    { key: "serial", header: "Serial", format: { as: "code" } },
    {
      key: "change",
      header: "Change",
      sortable: false,
      cell: (row) => <StateMark {...changeMarks[row.change as keyof typeof changeMarks]} />,
    },
    ...fields.flatMap(columnsOfField).map(withCell),
    {
      key: "bytesChanged",
      header: "bytes",
      format: { as: "count" },
      title: "How many bytes differ",
      sortable: false,
    },
  ];
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
