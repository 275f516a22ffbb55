"use client";

import { type KeyboardEvent, useState } from "react";
import { MapCells } from "@/app/_components/memory-map-cells";
import { type MapPart, mapRows } from "@/app/_components/memory-map-rows";
import { formatAddress } from "@/lib/domain/format/digest";

export type { MapPart } from "@/app/_components/memory-map-rows";

export interface MemoryMapProps {
  /** Size of the memory. */
  bytes: number;
  pageBytes: number;
  parts: readonly MapPart[];
  /** Image of a sample as hex; its bytes stand in the fields. */
  hex?: string;
  label: string;
  /** JSON pointer of the part that something beside the map points at. */
  shown?: string;
  /** The pointer or the focus came to a part, or left it. */
  onPoint?: (part: MapPart | undefined) => void;
  /** A part was clicked, or Enter pressed on it. */
  onChoose?: (part: MapPart) => void;
}

/**
 * The EEPROM as rows of sixteen cells: fields in their tint, pages ruled, unused bytes hatched. One stop of Tab; the arrow
 * keys go from part to part.
 */
export function MemoryMap({ bytes, pageBytes, parts, hex, label, shown, onPoint, onChoose }: MemoryMapProps) {
  const [pointed, setPointed] = useState<MapPart>();
  const point = (part: MapPart | undefined) => {
    setPointed(part);
    onPoint?.(part);
  };
  const lit = pointed ?? parts.find((part) => part.path !== undefined && part.path === shown);
  const rows = mapRows(bytes, parts);
  const first = rows.find((row) => row.parts.length > 0)?.at;
  return (
    <div className="relative overflow-x-auto">
      <table
        aria-label={label}
        onKeyDown={walk}
        onMouseLeave={() => point(undefined)}
        className="w-full min-w-[560px] border-separate border-spacing-[3px] table-fixed text-xs"
      >
        <colgroup>
          <col className="w-11" />
        </colgroup>
        <tbody>
          {rows.map((row) => (
            <tr key={row.at}>
              <th scope="row" className="text-left font-mono font-medium text-ink-soft">
                {formatAddress(row.at)}
                {row.rows > 1 ? (
                  <span className="sr-only"> to {formatAddress(row.at + row.rows * 16 - 1)}, unused</span>
                ) : null}
              </th>
              <MapCells
                row={row}
                hex={hex}
                lit={lit}
                over={lit?.over ?? []}
                pageStart={row.at % pageBytes === 0}
                tabStop={row.at === first}
                onPoint={point}
                onChoose={onChoose}
              />
            </tr>
          ))}
        </tbody>
      </table>
      <p role="status" className="mt-1 min-h-[1.45em] text-xs text-ink-soft print:hidden">
        {lit ? partText(lit) : ""}
      </p>
    </div>
  );
}

function partText({ name, at, length, over }: MapPart): string {
  const place = `${name}: ${rangeText(at, at + length - 1)}, ${length === 1 ? "1 byte" : `${length} bytes`}`;
  return over
    ? `${place}; covers ${over.map(([from, to]) => rangeText(from, to)).join(", then ") || "nothing"}`
    : place;
}

const rangeText = (from: number, to: number) =>
  from === to ? formatAddress(from) : `${formatAddress(from)} to ${formatAddress(to)}`;

const steps: Record<string, number> = { ArrowRight: 1, ArrowDown: 1, ArrowLeft: -1, ArrowUp: -1 };

/** Arrow keys, Home and End move the focus from part to part. */
function walk(event: KeyboardEvent<HTMLTableElement>): void {
  const cells = [...event.currentTarget.querySelectorAll<HTMLElement>("[data-part]")];
  const at = cells.indexOf(document.activeElement as HTMLElement);
  const step = steps[event.key];
  const next = event.key === "Home" ? 0 : event.key === "End" ? cells.length - 1 : step && at + step;
  if (next === undefined || at < 0) return;
  event.preventDefault();
  cells[Math.max(0, Math.min(next, cells.length - 1))]?.focus();
}
