"use client";

import { useState } from "react";
import { cellsOf, type MapPart, type MapRow, mapRows } from "@/app/_components/memory-map-rows";
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
}

const tints = {
  identity: "bg-(--field-identity)",
  version: "bg-(--field-version)",
  temperature: "bg-(--field-temperature)",
  zero: "bg-(--field-zero)",
  gain: "bg-(--field-gain)",
  checksum: "bg-(--field-checksum)",
  other: "bg-sunk",
  kept: "bg-paper border-dashed",
} satisfies Record<MapPart["tint"], string>;

/** The EEPROM as rows of sixteen cells: fields in their tint, pages ruled, unused bytes hatched. */
export function MemoryMap({ bytes, pageBytes, parts, hex, label }: MemoryMapProps) {
  const [covering, setCovering] = useState<MapPart>();
  const over = covering?.over;
  return (
    <div className="relative overflow-x-auto">
      <table
        aria-label={label}
        className="w-full min-w-[560px] border-separate border-spacing-[3px] table-fixed text-xs"
      >
        <colgroup>
          <col className="w-11" />
        </colgroup>
        <tbody>
          {mapRows(bytes, parts).map((row) => (
            <tr key={row.at}>
              <th scope="row" className="text-left font-mono font-medium text-ink-soft">
                {formatAddress(row.at)}
                {row.rows > 1 ? (
                  <span className="sr-only"> to {formatAddress(row.at + row.rows * 16 - 1)}, unused</span>
                ) : null}
              </th>
              <RowCells row={row} hex={hex} over={over} onCover={setCovering} pageStart={row.at % pageBytes === 0} />
            </tr>
          ))}
        </tbody>
      </table>
      {covering ? (
        <p role="status" className="mt-1 text-xs text-ink-soft">
          {covering.name} covers {over ? over.map(rangeText).join(", then ") : "nothing"}
        </p>
      ) : null}
    </div>
  );
}

const rangeText = ([from, to]: readonly [number, number]) => `${formatAddress(from)} to ${formatAddress(to)}`;

interface RowCellsProps {
  row: MapRow;
  hex: string | undefined;
  over: MapPart["over"];
  onCover: (part: MapPart | undefined) => void;
  pageStart: boolean;
}

function RowCells({ row, hex, over, onCover, pageStart }: RowCellsProps) {
  return cellsOf(row).map((cell) => {
    const covered = over?.some(([from, to]) => cell.at <= to && cell.at + cell.length - 1 >= from) ?? false;
    const outline = covered ? "outline-2 -outline-offset-1 outline-oxide" : "";
    const page = pageStart ? "border-t-2 border-t-ink-faint" : "";
    if (!cell.part) {
      return (
        <td
          key={cell.at}
          colSpan={cell.length}
          className={`rounded-xs hatched ${row.empty ? "h-[22px]" : "h-10"} ${outline}`}
        >
          <span className="sr-only">unused</span>
        </td>
      );
    }
    const { part } = cell;
    return (
      <td
        key={`${cell.at}${part.name}`}
        colSpan={cell.length}
        title={`${part.name}, ${formatAddress(part.at)} to ${formatAddress(part.at + part.length - 1)}`}
        tabIndex={part.over ? 0 : undefined}
        onMouseEnter={() => part.over && onCover(part)}
        onMouseLeave={() => onCover(undefined)}
        onFocus={() => part.over && onCover(part)}
        onBlur={() => onCover(undefined)}
        className={`h-10 overflow-hidden rounded-xs border border-ink/18 px-1.5 py-1 align-top leading-[1.2] ${tints[part.tint]} ${
          cell.overlap ? "border-2 border-oxide" : page
        } ${outline}`}
      >
        <span className="block truncate">{cell.continued ? "…" : part.name}</span>
        <span className="block truncate font-mono text-ink-soft">
          {cell.overlap ? "overlap" : bytesText(cell, hex, part)}
        </span>
      </td>
    );
  });
}

function bytesText(cell: { at: number; length: number }, hex: string | undefined, part: MapPart): string {
  if (part.tint === "kept") return "kept";
  const bytes = hex?.slice(cell.at * 2, (cell.at + cell.length) * 2).match(/../g) ?? [];
  if (part.isText)
    return bytes
      .map((pair) => String.fromCharCode(Number.parseInt(pair, 16)))
      .join("")
      .replaceAll("\0", "");
  return bytes.join(" ").toUpperCase();
}
