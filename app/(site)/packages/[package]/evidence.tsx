import type { ReactNode } from "react";
import { formatCount, formatFigure } from "@/lib/domain/format/figure";

const LISTED = 40;
const ROWS = 200;
const HEX = /^[0-9a-f]{16,}$/;
const SERIAL = /^[A-Z0-9][A-Z0-9._-]{3,31}$/;

/** What a check saw, in words and figures: facts in a row, lists of serials, tables of devices. */
export function Evidence({ value }: { value: unknown }) {
  if (!isRecord(value)) return <Plain value={value} />;
  const facts = Object.entries(value).filter(([, one]) => !isList(one) && !isRecord(one));
  const parts = Object.entries(value).filter(([, one]) => (isList(one) && one.length > 0) || isRecord(one));
  if (facts.length === 0 && parts.length === 0) return <p className="text-sm text-ink-soft">Nothing further.</p>;
  return (
    <div className="flex flex-col gap-3 text-sm">
      {facts.length > 0 ? (
        <dl className="flex flex-wrap gap-x-6 gap-y-2">
          {facts.map(([key, one]) => (
            <div key={key} className="min-w-0">
              <dt className="text-xs text-ink-soft">{words(key)}</dt>
              <dd>
                <Plain value={one} />
              </dd>
            </div>
          ))}
        </dl>
      ) : null}
      {parts.map(([key, one]) => (
        <div key={key} className="min-w-0">
          <p className="mb-1 text-xs text-ink-soft">
            {words(key)}
            {isList(one) ? `, ${formatCount(one.length)}` : ""}
          </p>
          {isList(one) ? <List items={one} label={words(key)} /> : <Evidence value={one} />}
        </div>
      ))}
    </div>
  );
}

function List({ items, label }: { items: readonly unknown[]; label: string }) {
  if (items.some(isRecord)) return <Table rows={items.filter(isRecord)} label={label} />;
  const rest = items.length - LISTED;
  return (
    <p className="flex flex-wrap gap-x-3 gap-y-0.5">
      {items.slice(0, LISTED).map((item) => (
        <Plain key={String(item)} value={item} />
      ))}
      {rest > 0 ? <span className="text-ink-soft">and {formatCount(rest)} more</span> : null}
    </p>
  );
}

function Table({ rows, label }: { rows: readonly Record<string, unknown>[]; label: string }) {
  const keys = [...new Set(rows.flatMap((row) => Object.keys(row)))];
  const isNumber = (key: string) => rows.every((row) => typeof row[key] === "number" || row[key] == null);
  const side = (key: string) => (isNumber(key) ? "text-right font-mono" : "text-left");
  return (
    <div className="max-h-80 overflow-auto">
      <table aria-label={label} className="text-sm">
        <thead>
          <tr>
            {keys.map((key) => (
              <th
                key={key}
                scope="col"
                className={`sticky top-0 border-b border-rule bg-raised py-1 pr-4 text-xs font-semibold whitespace-nowrap text-ink-soft ${side(key)}`}
              >
                {words(key)}
              </th>
            ))}
          </tr>
        </thead>
        <tbody>
          {rows.slice(0, ROWS).map((row, at) => (
            // biome-ignore lint/suspicious/noArrayIndexKey: evidence is a fixed list and may name a serial twice
            <tr key={at}>
              {keys.map((key) => (
                <td key={key} className={`border-b border-rule/55 py-1 pr-4 whitespace-nowrap ${side(key)}`}>
                  <Plain value={row[key]} />
                </td>
              ))}
            </tr>
          ))}
        </tbody>
      </table>
      {rows.length > ROWS ? (
        <p className="mt-1 text-ink-soft">
          The first {ROWS} of {formatCount(rows.length)}.
        </p>
      ) : null}
    </div>
  );
}

function Plain({ value }: { value: unknown }): ReactNode {
  if (value === null || value === undefined || value === "") return "—";
  if (typeof value === "boolean") return value ? "yes" : "no";
  if (typeof value === "number") return <span className="font-mono">{number(value)}</span>;
  if (typeof value !== "string") return isList(value) ? value.map(String).join(", ") : JSON.stringify(value);
  if (HEX.test(value)) {
    return (
      <span className="font-mono" title={value}>
        {value.length > 16 ? `${value.slice(0, 12)}…` : value}
      </span>
    );
  }
  return SERIAL.test(value) ? <span className="font-mono">{value}</span> : value;
}

/** Counts whole, small numbers with six significant digits. */
function number(value: number): string {
  if (Number.isInteger(value)) return formatCount(value);
  const size = Math.abs(value);
  if (size < 1e-3 || size >= 1e6) return value.toExponential(4).replaceAll("-", "−");
  return formatFigure(value, { digits: Math.max(0, 5 - Math.floor(Math.log10(size))) });
}

/** `worstSerial` as "worst serial". */
export function words(key: string): string {
  return key
    .replaceAll(/([a-z0-9])([A-Z])/g, (_, a: string, b: string) => `${a} ${b.toLowerCase()}`)
    .replaceAll(/[-_.]/g, " ");
}

function isRecord(value: unknown): value is Record<string, unknown> {
  return typeof value === "object" && value !== null && !Array.isArray(value);
}

function isList(value: unknown): value is readonly unknown[] {
  return Array.isArray(value);
}
