"use client";

import { Fragment } from "react";
import { ScrollRegion } from "@/app/_components/scroll-region";
import { formatCount } from "@/lib/domain/format/figure";
import type { Column } from "@/lib/domain/readings/columns";
import type { GivenRow } from "@/lib/domain/readings/given-table";
import { ALL_COLUMNS, type ColumnMap, type MapOptions, missingColumns } from "@/lib/domain/readings/map-table";
import { type PlacedError, PreviewRow } from "./preview-row";
import type { TableFacts } from "./worker-messages";

const MEANINGS: Record<Column, string> = {
  serial: "serial",
  point: "point: temperature of the run",
  chamber_c: "chamber_c: reference sensor, °C",
  soak_min: "soak_min: soak, min",
  device_temp: "device_temp: own thermometer",
  load_kg: "load_kg: applied load, kg",
  signal_mv_v: "signal_mv_v: output, mV/V",
  taken_at: "taken_at: time",
  position: "position in the chamber",
  hardware_id: "hardware_id of the board",
  dwell_s: "dwell_s: time under load, s",
  output_mv_v: "output_mv_v: compensated, mV/V",
};

export interface TablePreviewProps {
  facts: TableFacts;
  map: ColumnMap;
  options: MapOptions;
  errors: readonly PlacedError[];
  /** Rows that errors name. */
  wrongRows: readonly GivenRow[];
  disabled: boolean;
  onColumn: (place: number, column: Column | undefined) => void;
}

/** The first rows of the given table with what each column is, and the first rows that are wrong with what is wrong in them. */
export function TablePreview({ facts, map, options, errors, wrongRows, disabled, onColumn }: TablePreviewProps) {
  const shown = rowsShown(facts.first, wrongRows);
  const missing = new Set(missingColumns(map));
  return (
    <ScrollRegion label="Preview of the file" className="max-h-[560px] overflow-auto border border-rule">
      <table className="w-full border-separate border-spacing-0 text-sm">
        <thead>
          <tr>
            <th
              scope="col"
              className="sticky top-0 left-0 z-2 border-b border-rule bg-raised px-2 py-2 text-right text-xs text-ink-soft"
            >
              Row
            </th>
            {facts.names.map((name, place) => (
              <ColumnHead key={name} {...{ name, place, map, missing, disabled, onColumn }} />
            ))}
          </tr>
        </thead>
        <tbody>
          {shown.map((row, index) => (
            <Fragment key={row.line}>
              {isGap(shown[index - 1], row, facts) ? <Gap width={facts.names.length + 1} /> : null}
              <PreviewRow
                row={row}
                width={facts.names.length}
                map={map}
                options={options}
                errors={errors.filter((error) => error.row === row.line)}
              />
            </Fragment>
          ))}
        </tbody>
      </table>
    </ScrollRegion>
  );
}

interface ColumnHeadProps extends Pick<TablePreviewProps, "map" | "disabled" | "onColumn"> {
  name: string;
  place: number;
  missing: ReadonlySet<Column>;
}

function ColumnHead({ name, place, map, missing, disabled, onColumn }: ColumnHeadProps) {
  const column = ALL_COLUMNS.find((one) => map[one] === place);
  const used = new Set(ALL_COLUMNS.filter((one) => map[one] !== undefined));
  return (
    <th
      scope="col"
      className="sticky top-0 z-1 min-w-44 border-b border-l border-rule bg-raised px-2 py-2 text-left align-bottom"
    >
      <select
        aria-label={`What column ${name} is`}
        value={column ?? ""}
        disabled={disabled}
        onChange={(event) => onColumn(place, (event.currentTarget.value || undefined) as Column | undefined)}
        className={`mb-1 block h-8 w-full rounded border bg-paper px-1.5 text-xs font-semibold ${column ? "border-copper text-ink" : "border-ink-faint text-ink-soft"}`}
      >
        <option value="">not used</option>
        {ALL_COLUMNS.map((one) => (
          <option key={one} value={one}>
            {MEANINGS[one]}
            {missing.has(one) ? " (needed)" : used.has(one) && one !== column ? " (moves here)" : ""}
          </option>
        ))}
      </select>
      <span className="block max-w-56 truncate font-mono text-xs font-normal text-ink-soft" title={name}>
        {name}
      </span>
    </th>
  );
}

function Gap({ width }: { width: number }) {
  return (
    <tr>
      <td colSpan={width} className="border-b border-rule/55 bg-sunk px-2 py-0.5 text-xs text-ink-soft">
        <span role="img" aria-label="rows left out">
          ⋯
        </span>
      </td>
    </tr>
  );
}

function rowsShown(first: readonly GivenRow[], wrong: readonly GivenRow[]): GivenRow[] {
  const byLine = new Map([...first, ...wrong].map((row) => [row.line, row]));
  return [...byLine.values()].sort((a, b) => a.line - b.line);
}

/** Whether rows were left out between two that are shown. */
function isGap(before: GivenRow | undefined, row: GivenRow, { first }: TableFacts): boolean {
  const lastFirst = first.at(-1)?.line ?? 0;
  return before !== undefined && before.line >= lastFirst && row.line > before.line + 1;
}

/** How many errors there are and how many of them stand in the preview, in words. */
export function errorCountText(total: number, shown: number): string {
  const count = total === 1 ? "One error" : `${formatCount(total)} errors`;
  return total > shown ? `${count}; the first ${formatCount(shown)} are marked below` : `${count}, marked below`;
}
