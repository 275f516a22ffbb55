"use client";

import { ToneShape } from "@/app/_components/state/state-mark";
import type { Column } from "@/lib/domain/readings/columns";
import type { GivenRow } from "@/lib/domain/readings/given-table";
import { type ColumnMap, type MapOptions, mapRow } from "@/lib/domain/readings/map-table";

/** What is wrong in a row of the given file; `column` is one of ours. */
export interface PlacedError {
  row: number;
  column: string;
  code: string;
  message: string;
}

export interface PreviewRowProps {
  row: GivenRow;
  /** Columns of the table. */
  width: number;
  map: ColumnMap;
  options: MapOptions;
  errors: readonly PlacedError[];
}

/** A row as it was given, its wrong cells marked, with what is wrong in it underneath. */
export function PreviewRow({ row, width, map, options, errors }: PreviewRowProps) {
  const wrong = errors.length > 0;
  const wrongPlaces = new Set(errors.map((error) => map[error.column as Column]));
  const used = new Set(Object.values(map));
  return (
    <>
      <tr className={wrong ? "bg-oxide/8" : undefined}>
        <th
          scope="row"
          className="sticky left-0 border-b border-rule/55 bg-raised px-2 py-1 text-right font-mono text-xs font-normal text-ink-soft"
        >
          {wrong ? (
            <span className="inline-flex items-center gap-1 font-semibold text-oxide">
              <ToneShape tone="bad" size={10} />
              {row.line}
            </span>
          ) : (
            row.line
          )}
        </th>
        {Array.from({ length: width }, (_, place) => (
          <td
            // biome-ignore lint/suspicious/noArrayIndexKey: a column's place is what it is
            key={place}
            className={`max-w-56 truncate border-b border-l border-rule/55 px-2 py-1 font-mono ${used.has(place) ? "" : "text-ink-soft"} ${
              wrongPlaces.has(place) ? "font-semibold text-oxide outline-2 -outline-offset-2 outline-oxide" : ""
            }`}
            title={row.cells[place]}
          >
            {cellText(row, place, map, options)}
          </td>
        ))}
      </tr>
      {errors.map((error) => (
        <tr key={`${error.column} ${error.code}`} className="bg-oxide/8">
          <td className="sticky left-0 border-b border-rule/55 bg-raised" />
          <td colSpan={width} className="border-b border-rule/55 px-2 py-1">
            <span className="sticky left-14 inline-block max-w-[min(100%,70ch)] text-oxide">
              {error.column ? <span className="font-mono font-semibold">{error.column}: </span> : null}
              {error.message} <span className="font-mono text-xs text-ink-soft">{error.code}</span>
            </span>
          </td>
        </tr>
      ))}
    </>
  );
}

/** A cell as it was given; the days of a workbook's date as the time that is sent for them. */
function cellText(row: GivenRow, place: number, map: ColumnMap, options: MapOptions): string | undefined {
  const isDays = map.taken_at === place && row.kinds?.[place] === "number";
  return isDays ? mapRow(row, map, ["taken_at"], options)[0] : row.cells[place];
}
