"use client";

import { useVirtualizer } from "@tanstack/react-virtual";
import { useEffect, useRef, useState } from "react";
import { usePrinting } from "@/app/_components/print/use-printing";
import { BodyRow } from "@/app/_components/table/body-row";
import type { DataColumn, Row } from "@/app/_components/table/column";
import { ColumnWidths } from "@/app/_components/table/column-widths";
import { PrintedBody } from "@/app/_components/table/printed-body";
import { TableHead } from "@/app/_components/table/table-head";
import { usePaperFit } from "@/app/_components/table/use-paper-fit";

/** From so many rows on only those in sight are drawn, at fixed widths. */
export const virtualFrom = 120;
const rowHeight = 34;
/** Half a second on most screens. */
const DRAWN_WITHIN_FRAMES = 30;

export interface TableGridProps {
  name: string;
  columns: readonly DataColumn[];
  /** A row that is not loaded yet is undefined and keeps its place. */
  rows: readonly (Row | undefined)[];
  keyOf: (row: Row) => string;
  rowHref?: string;
  /** Opens a row beside the table; `opened` is the key of the one shown. */
  onOpen?: (row: Row) => void;
  opened?: string;
  sort?: { key: string; descending: boolean };
  onSort: (key: string) => void;
  /** The reader came near the last row. */
  onEnd?: () => void;
  /** First and last row drawn, as the reader moves. Has to stay the same function. */
  onSight?: (first: number, last: number) => void;
  selected?: ReadonlySet<string>;
  onSelected?: (keys: ReadonlySet<string>) => void;
}

/** The rows themselves: sticky heading and first column, arrow keys, Enter opens, Space selects. */
export function TableGrid(props: TableGridProps) {
  const { columns, rows, keyOf } = props;
  const box = useRef<HTMLDivElement>(null);
  const table = useRef<HTMLTableElement>(null);
  const printing = usePrinting();
  const [current, setCurrent] = useState(0);
  const isVirtual = rows.length > virtualFrom;
  const virtualizer = useVirtualizer({
    count: rows.length,
    getScrollElement: () => box.current,
    estimateSize: () => rowHeight,
    overscan: 16,
    enabled: isVirtual,
    initialRect: { width: 1_000, height: 640 },
  });
  const items = isVirtual ? virtualizer.getVirtualItems() : rows.map((_, index) => ({ index, start: 0, end: 0 }));
  const lastDrawn = items.at(-1)?.index ?? 0;
  const firstDrawn = items[0]?.index ?? 0;
  const { onEnd, onSight } = props;
  useEffect(() => {
    if (lastDrawn >= rows.length - 40) onEnd?.();
  }, [lastDrawn, rows.length, onEnd]);
  usePaperFit(table, columns, printing);
  useEffect(() => onSight?.(firstDrawn, lastDrawn), [firstDrawn, lastDrawn, onSight]);

  const before = isVirtual ? (items[0]?.start ?? 0) : 0;
  const after = isVirtual ? virtualizer.getTotalSize() - (items.at(-1)?.end ?? 0) : 0;
  /** The row that the focus is on its way to: keys come faster than rows are drawn. */
  const underway = useRef<number>(undefined);
  const focusDrawn = (index: number, framesLeft: number) =>
    requestAnimationFrame(() => {
      if (underway.current !== index) return;
      const row = box.current?.querySelector<HTMLElement>(`[data-row="${index}"]`);
      row?.focus();
      if (row || framesLeft === 0) underway.current = undefined;
      else focusDrawn(index, framesLeft - 1);
    });
  const move = (from: number, by: number) => {
    const next = Math.min(Math.max((underway.current ?? from) + by, 0), rows.length - 1);
    underway.current = next;
    setCurrent(next);
    if (isVirtual) virtualizer.scrollToIndex(next);
    focusDrawn(next, DRAWN_WITHIN_FRAMES);
  };

  return (
    <div ref={box} className={`overflow-auto ${isVirtual ? "max-h-[min(70vh,680px)]" : ""}`}>
      <table
        ref={table}
        aria-label={props.name}
        aria-rowcount={rows.length + 1}
        className={`paper-table w-full border-separate border-spacing-0 text-sm ${isVirtual ? "table-fixed print:table-auto" : ""}`}
      >
        {isVirtual ? <ColumnWidths columns={columns} rows={rows} selectable={props.selected !== undefined} /> : null}
        <TableHead {...props} />
        <Spacer height={before} />
        {printing && isVirtual ? <PrintedBody columns={columns} rows={rows} keyOf={keyOf} /> : null}
        <tbody className={isVirtual ? "print:hidden" : undefined}>
          {items.map(({ index }) => {
            const row = rows[index];
            return row ? (
              <BodyRow
                key={keyOf(row)}
                {...props}
                row={row}
                index={index}
                tabbable={index === Math.min(current, rows.length - 1)}
                onMove={move}
              />
            ) : (
              <WaitingRow key={`waiting ${index}`} index={index} columns={columns.length} />
            );
          })}
        </tbody>
        <Spacer height={after} />
      </table>
    </div>
  );
}

/** Keeps the place of a row that is still on its way. */
function WaitingRow({ index, columns }: { index: number; columns: number }) {
  return (
    <tr aria-rowindex={index + 2} aria-busy="true" style={{ height: rowHeight }}>
      <td colSpan={columns} className="border-b border-rule/55 pl-1.5 text-ink-faint">
        …
      </td>
    </tr>
  );
}

/** Room for the rows that are not drawn; nothing to a screen reader, which counts by `aria-rowindex`. */
function Spacer({ height }: { height: number }) {
  if (height <= 0) return null;
  return (
    <tbody aria-hidden="true" className="print:hidden">
      <tr style={{ height }} />
    </tbody>
  );
}
