"use client";

import { useVirtualizer } from "@tanstack/react-virtual";
import { useRouter } from "next/navigation";
import { type KeyboardEvent, type MouseEvent, useEffect, useRef, useState } from "react";
import { type DataColumn, hrefOf, isMono, isRight, type Row, textOf, unitOf } from "@/app/_components/table/column";
import { DataCell } from "@/app/_components/table/data-cell";

/** From so many rows on only those in sight are drawn, at fixed widths. */
const virtualFrom = 120;
const rowHeight = 34;

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
  useEffect(() => onSight?.(firstDrawn, lastDrawn), [firstDrawn, lastDrawn, onSight]);

  const before = isVirtual ? (items[0]?.start ?? 0) : 0;
  const after = isVirtual ? virtualizer.getTotalSize() - (items.at(-1)?.end ?? 0) : 0;
  const focusRow = (index: number) => {
    const next = Math.min(Math.max(index, 0), rows.length - 1);
    setCurrent(next);
    if (isVirtual) virtualizer.scrollToIndex(next);
    requestAnimationFrame(() => box.current?.querySelector<HTMLElement>(`[data-row="${next}"]`)?.focus());
  };

  return (
    <div
      ref={box}
      className={`overflow-auto print:max-h-none print:overflow-visible ${isVirtual ? "max-h-[min(70vh,680px)]" : ""}`}
    >
      <table
        aria-label={props.name}
        aria-rowcount={rows.length + 1}
        className={`w-full border-separate border-spacing-0 text-sm ${isVirtual ? "table-fixed" : ""}`}
      >
        {isVirtual ? <Widths columns={columns} rows={rows} selectable={props.selected !== undefined} /> : null}
        <TableHead {...props} />
        <Spacer height={before} />
        <tbody>
          {items.map(({ index }) => {
            const row = rows[index];
            return row ? (
              <BodyRow
                key={keyOf(row)}
                {...props}
                row={row}
                index={index}
                tabbable={index === Math.min(current, rows.length - 1)}
                onMove={focusRow}
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
    <tbody aria-hidden="true">
      <tr style={{ height }} />
    </tbody>
  );
}

/** Advance of a figure of the mono face at 14 px, rounded up: at less, the last digit of a serial is cut. */
const MONO_PX = 8.9;

/** Fixed widths from the longest of the first texts, so that columns stay where they are while rows come and go. */
function Widths({
  columns,
  rows,
  selectable,
}: {
  columns: readonly DataColumn[];
  rows: TableGridProps["rows"];
  selectable: boolean;
}) {
  const sample = rows.slice(0, 200).filter((row) => row !== undefined);
  return (
    <colgroup>
      {selectable ? <col style={{ width: 36 }} /> : null}
      {columns.map((column, at) => {
        const extra = column.format?.as === "state" ? 3 : 0;
        // What a link leads to is a serial or a code more often than not.
        const px = isMono(column) || column.format?.as === "link" ? MONO_PX : 8;
        const longest = Math.max(column.header.length + 2, ...sample.map((row) => textOf(column, row).length + extra));
        return (
          <col
            key={column.key}
            style={{ width: `calc(${Math.min(longest, 48) * px}px + ${roomBefore(columns, at) ? 34 : 18}px)` }}
          />
        );
      })}
    </colgroup>
  );
}

/** Text right after figures would run into them: its column begins a little later. */
function roomBefore(columns: readonly DataColumn[], at: number): string {
  const [before, column] = [columns[at - 1], columns[at]];
  return before && column && isRight(before) && !isRight(column) ? "pl-4" : "";
}

const headLook =
  "sticky top-0 border-b border-rule bg-raised py-1.5 pr-3 text-xs font-semibold text-ink-soft whitespace-nowrap";

function TableHead({ columns, rows, keyOf, sort, onSort, selected, onSelected }: TableGridProps) {
  const keys = selected ? rows.flatMap((row) => (row ? [keyOf(row)] : [])) : [];
  const all = keys.length > 0 && keys.every((key) => selected?.has(key));
  return (
    <thead>
      <tr>
        {selected ? (
          <th scope="col" className={`${headLook} z-10 pl-1.5 text-left print:hidden`}>
            <input
              type="checkbox"
              aria-label="Select all rows shown"
              checked={all}
              onChange={() => onSelected?.(all ? new Set() : new Set(keys))}
              className="size-4 accent-copper"
            />
          </th>
        ) : null}
        {columns.map((column, index) => {
          const unit = unitOf(column);
          const direction = sort?.key === column.key ? (sort.descending ? "descending" : "ascending") : undefined;
          const place = index === 0 ? "left-0 z-20 pl-1.5" : `z-10 ${roomBefore(columns, index)}`;
          return (
            <th
              key={column.key}
              scope="col"
              title={column.title}
              aria-sort={direction}
              className={`${headLook} ${place} ${isRight(column) ? "text-right" : "text-left"}`}
            >
              {column.sortable === false ? (
                column.header
              ) : (
                <button type="button" onClick={() => onSort(column.key)} className="font-semibold hover:text-ink">
                  {column.header}
                  <span aria-hidden="true" className="text-copper">
                    {direction === "ascending" ? " ↑" : direction === "descending" ? " ↓" : ""}
                  </span>
                </button>
              )}
              {unit ? <span className="block font-normal">{unit}</span> : null}
            </th>
          );
        })}
      </tr>
    </thead>
  );
}

interface BodyRowProps extends TableGridProps {
  row: Row;
  index: number;
  /** The one row that Tab reaches. */
  tabbable: boolean;
  onMove: (index: number) => void;
}

function BodyRow(props: BodyRowProps) {
  const { columns, row, index, keyOf, rowHref, onOpen, opened, selected, onSelected, tabbable, onMove } = props;
  const router = useRouter();
  const key = keyOf(row);
  const href = rowHref ? hrefOf(rowHref, row) : undefined;
  const isSelected = selected?.has(key) ?? false;
  const toggle = () => {
    const next = new Set(selected);
    if (!next.delete(key)) next.add(key);
    onSelected?.(next);
  };
  const onKeyDown = (event: KeyboardEvent) => {
    if (event.target !== event.currentTarget) return;
    const move = { ArrowDown: 1, ArrowUp: -1, PageDown: 15, PageUp: -15 }[event.key];
    if (move) onMove(index + move);
    else if (event.key === "Home") onMove(0);
    else if (event.key === "End") onMove(Number.MAX_SAFE_INTEGER);
    else if (event.key === "Enter" && onOpen) onOpen(row);
    else if (event.key === "Enter" && href) router.push(href);
    else if (event.key === " " && selected) toggle();
    else return;
    event.preventDefault();
  };
  const onClick = (event: MouseEvent) => {
    const inControl = (event.target as HTMLElement).closest("a, button, input, label, summary");
    if (inControl || window.getSelection()?.toString()) return;
    if (onOpen) onOpen(row);
    else if (href) router.push(href);
  };
  const isOpen = opened !== undefined && key === opened;
  const back = isSelected || isOpen ? "bg-tint" : "bg-raised group-hover:bg-paper group-focus:bg-tint";
  const look = `border-b border-rule/55 py-1.5 pr-3 whitespace-nowrap ${back}`;

  return (
    <tr
      data-row={index}
      aria-rowindex={index + 2}
      aria-selected={selected ? isSelected : undefined}
      aria-current={isOpen || undefined}
      tabIndex={tabbable ? 0 : -1}
      onKeyDown={onKeyDown}
      onClick={onClick}
      className={`group focus-visible:outline-offset-[-2px] ${href || onOpen ? "cursor-pointer" : ""}`}
    >
      {selected ? (
        <td className={`${look} pl-1.5 print:hidden`}>
          <input
            type="checkbox"
            tabIndex={-1}
            aria-label={`Select ${key}`}
            checked={isSelected}
            onChange={toggle}
            className="block size-4 accent-copper"
          />
        </td>
      ) : null}
      {columns.map((column, at) => {
        const place = at === 0 ? "sticky left-0 z-[5] pl-1.5" : roomBefore(columns, at);
        const type = `${isRight(column) ? "text-right" : ""} ${isMono(column) ? "font-mono" : ""}`;
        return (
          <td key={column.key} className={`${look} ${place} ${type} overflow-hidden text-ellipsis`}>
            <DataCell column={column} row={row} href={at === 0 ? href : undefined} />
          </td>
        );
      })}
    </tr>
  );
}
