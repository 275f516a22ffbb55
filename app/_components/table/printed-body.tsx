import { type DataColumn, isMono, isRight, type Row } from "@/app/_components/table/column";
import { roomBefore } from "@/app/_components/table/column-widths";
import { DataCell } from "@/app/_components/table/data-cell";
import { type PrintedStretch, printedStretches } from "@/app/_components/table/printed-rows";

export interface PrintedBodyProps {
  columns: readonly DataColumn[];
  rows: readonly (Row | undefined)[];
  keyOf: (row: Row) => string;
}

/**
 * The rows as paper takes them, beside those of the screen, which keep their places: nothing of the screen moves while the
 * page is printed.
 */
export function PrintedBody({ columns, rows, keyOf }: PrintedBodyProps) {
  return (
    <tbody data-printed="" className="hidden print:table-row-group">
      {printedStretches(rows).map((stretch, at) => [
        at > 0 || stretch.from > 0 ? (
          <tr key={`before ${stretch.from}`}>
            <td colSpan={columns.length} className="border-b border-rule/55 text-center">
              …
            </td>
          </tr>
        ) : null,
        ...rowsOf(stretch, columns, keyOf),
      ])}
    </tbody>
  );
}

function rowsOf({ rows }: PrintedStretch, columns: readonly DataColumn[], keyOf: PrintedBodyProps["keyOf"]) {
  return rows.map((row) => (
    <tr key={keyOf(row)}>
      {columns.map((column, at) => (
        <td key={column.key} className={cellLook(columns, at)}>
          <DataCell column={column} row={row} />
        </td>
      ))}
    </tr>
  ));
}

function cellLook(columns: readonly DataColumn[], at: number): string {
  const column = columns[at] as DataColumn;
  const place = at === 0 ? "pl-1.5" : roomBefore(columns, at);
  const type = `${isRight(column) ? "text-right" : ""} ${isMono(column) ? "font-mono" : ""}`;
  return `border-b border-rule/55 ${place} ${type} ${printedCell(column)}`;
}

/** On paper texts wrap at their spaces; figures, serials and digests stay in one piece. */
export function printedCell(column: DataColumn): string {
  return `print:py-[0.3em] print:pr-[0.8em] ${isMono(column) ? "whitespace-nowrap" : "print:whitespace-normal"}`;
}
