import type { CSSProperties } from "react";
import { type DataColumn, isMono, isRight, type Row, textOf } from "@/app/_components/table/column";

/** Advance of a figure of the mono face at 14 px, rounded up: at less, the last digit of a serial is cut. */
const MONO_PX = 8.9;

/** Fixed widths from the longest of the first texts, so that columns stay where they are while rows come and go. */
export function ColumnWidths({
  columns,
  rows,
  selectable,
}: {
  columns: readonly DataColumn[];
  rows: readonly (Row | undefined)[];
  selectable: boolean;
}) {
  const sample = rows.slice(0, 200).filter((row) => row !== undefined);
  return (
    <colgroup>
      {selectable ? <col className="w-9 print:hidden" /> : null}
      {columns.map((column, at) => {
        const extra = column.format?.as === "state" ? 3 : 0;
        // What a link leads to is a serial or a code more often than not.
        const px = isMono(column) || column.format?.as === "link" ? MONO_PX : 8;
        const longest = Math.max(column.header.length + 2, ...sample.map((row) => textOf(column, row).length + extra));
        return (
          <col
            key={column.key}
            className="w-(--shown) print:w-auto"
            style={
              { "--shown": `${Math.min(longest, 48) * px + (roomBefore(columns, at) ? 34 : 18)}px` } as CSSProperties
            }
          />
        );
      })}
    </colgroup>
  );
}

/** Text right after figures would run into them: its column begins a little later. */
export function roomBefore(columns: readonly DataColumn[], at: number): string {
  const [before, column] = [columns[at - 1], columns[at]];
  return before && column && isRight(before) && !isRight(column) ? "pl-4" : "";
}
