"use client";

import { useMemo, useState } from "react";
import { formatAddress, formatByte } from "@/lib/domain/format/digest";

export interface HexField {
  name: string;
  at: number;
  length: number;
  /** Under the grid, as "+1044 steps" or a decoded value. */
  note?: string;
}

export interface HexGridProps {
  /** The image as hex. */
  hex: string;
  fields?: readonly HexField[];
  /** Offsets of bytes that differ. */
  changed?: readonly number[];
  /** Inclusive ranges that belong to the device. */
  kept?: readonly (readonly [number, number])[];
  /** Value of bytes that nothing covers. */
  fill?: number;
  /** Leaves out rows of fill. */
  onlyUsed?: boolean;
  /** What the grid shows, for those who don't see it. */
  label: string;
}

const cells = 16;

/** Bytes sixteen a row, the changed ones underlined; pointing at a byte shows its field and the other way round. */
export function HexGrid({ hex, fields = [], changed = [], kept = [], fill = 0xff, onlyUsed, label }: HexGridProps) {
  const bytes = useMemo(() => (hex.match(/../g) ?? []).map((pair) => Number.parseInt(pair, 16)), [hex]);
  const owner = useMemo(() => ownersOf(fields), [fields]);
  const changedAt = useMemo(() => new Set(changed), [changed]);
  const [active, setActive] = useState<HexField>();
  const isFaint = (at: number) =>
    kept.some(([from, to]) => at >= from && at <= to) || (bytes[at] === fill && !owner.has(at) && !changedAt.has(at));
  const rows = rowsOf(bytes.length).filter((row) => !onlyUsed || row.some((at) => at < bytes.length && !isFaint(at)));

  return (
    <div>
      {/* biome-ignore lint/a11y/noStaticElementInteractions: leaving clears the tie; the list below works by keyboard */}
      <div
        className="overflow-x-auto font-mono text-[13px] leading-[1.2] font-medium"
        onMouseLeave={() => setActive(undefined)}
      >
        <table
          aria-label={label}
          className="w-full min-w-[430px] table-fixed border-separate border-spacing-x-0 border-spacing-y-0.5"
        >
          <tbody>
            {rows.map((row) => (
              <tr key={row[0]}>
                <th scope="row" className="w-[11%] max-w-[52px] text-left font-normal text-ink-soft">
                  {formatAddress(row[0] ?? 0)}
                </th>
                {row.map((at) => (
                  <td
                    key={at}
                    title={owner.get(at)?.name}
                    onMouseEnter={() => setActive(owner.get(at))}
                    className={byteLook(
                      changedAt.has(at),
                      isFaint(at),
                      active !== undefined && owner.get(at) === active,
                    )}
                  >
                    {at < bytes.length ? formatByte(bytes[at] ?? 0) : ""}
                  </td>
                ))}
              </tr>
            ))}
          </tbody>
        </table>
      </div>
      {fields.length ? (
        <ul className="mt-2.5 flex flex-wrap gap-x-1 gap-y-0.5 text-sm text-ink-soft" aria-label="Fields">
          {fields.map((field) => (
            <li key={`${field.name}${field.at}`}>
              <button
                type="button"
                onMouseEnter={() => setActive(field)}
                onFocus={() => setActive(field)}
                onBlur={() => setActive(undefined)}
                className={`rounded px-1.5 ${active === field ? "bg-tint text-ink" : ""}`}
              >
                <span className={`text-ink ${isChanged(field, changedAt) ? "font-bold" : ""}`}>{field.name}</span>{" "}
                <span className="font-mono text-xs">{formatAddress(field.at)}</span>
                {field.note ? ` ${field.note}` : ""}
              </button>
            </li>
          ))}
        </ul>
      ) : null}
    </div>
  );
}

function byteLook(changed: boolean, faint: boolean, active: boolean): string {
  const base = "border-b-2 py-[3px] text-center";
  if (changed) return `${base} border-copper bg-tint font-bold ${active ? "text-copper-strong" : ""}`;
  if (active) return `${base} border-transparent bg-tint`;
  return `${base} border-transparent ${faint ? "text-ink-faint" : ""}`;
}

function rowsOf(length: number): number[][] {
  return Array.from({ length: Math.ceil(length / cells) }, (_, row) =>
    Array.from({ length: cells }, (_, cell) => row * cells + cell),
  );
}

function ownersOf(fields: readonly HexField[]): Map<number, HexField> {
  return new Map(
    fields.flatMap((field) => Array.from({ length: field.length }, (_, i) => [field.at + i, field] as const)),
  );
}

function isChanged(field: HexField, changedAt: ReadonlySet<number>): boolean {
  return Array.from({ length: field.length }, (_, i) => field.at + i).some((at) => changedAt.has(at));
}
