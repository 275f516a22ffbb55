"use client";

import { useRouter } from "next/navigation";
import type { KeyboardEvent, MouseEvent } from "react";
import { hrefOf, isMono, isRight, type Row } from "@/app/_components/table/column";
import { roomBefore } from "@/app/_components/table/column-widths";
import { DataCell } from "@/app/_components/table/data-cell";
import { printedCell } from "@/app/_components/table/printed-body";
import type { TableGridProps } from "@/app/_components/table/table-grid";

interface BodyRowProps extends TableGridProps {
  row: Row;
  index: number;
  /** The one row that Tab reaches. */
  tabbable: boolean;
  /** Moves the focus by some rows, or beyond either end to it. */
  onMove: (from: number, by: number) => void;
}

const MOVES: Readonly<Record<string, number>> = {
  ArrowDown: 1,
  ArrowUp: -1,
  PageDown: 15,
  PageUp: -15,
  Home: Number.NEGATIVE_INFINITY,
  End: Number.POSITIVE_INFINITY,
};

/** One row: opens by click or Enter, moves by arrow keys, is selected by Space. */
export function BodyRow(props: BodyRowProps) {
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
    const move = MOVES[event.key];
    if (move) onMove(index, move);
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
        const place = at === 0 ? "sticky left-0 z-[5] pl-1.5 print:static" : roomBefore(columns, at);
        const type = `${isRight(column) ? "text-right" : ""} ${isMono(column) ? "font-mono" : ""}`;
        return (
          <td
            key={column.key}
            className={`${look} ${place} ${type} overflow-hidden text-ellipsis ${printedCell(column)}`}
          >
            <DataCell column={column} row={row} href={at === 0 ? href : undefined} />
          </td>
        );
      })}
    </tr>
  );
}
