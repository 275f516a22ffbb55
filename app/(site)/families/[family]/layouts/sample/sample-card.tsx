"use client";

import { Card } from "@/app/_components/card";
import { decodedNumber, formatText } from "@/lib/domain/format/field-value";
import { formatFigure } from "@/lib/domain/format/figure";
import type { CoefficientName, LayoutDocument } from "@/schemas/documents/layout";
import type { Sample, SampleRow } from "./encode-sample";
import { SampleChoice, type SampleOrigin } from "./sample-choice";

interface SampleCardProps {
  layout: LayoutDocument | null;
  sample: Sample | { refusal: string } | null;
  origin: SampleOrigin;
  lots: readonly string[];
  shown: string | undefined;
  onOrigin: (origin: SampleOrigin) => void;
  onPoint: (path: string | undefined) => void;
}

/** A device's values, as stored and as the firmware reads them back. */
export function SampleCard({ layout, sample, origin, lots, shown, onOrigin, onPoint }: SampleCardProps) {
  return (
    <Card title="Sample, encoded and read back" note={noteOf(origin)}>
      <SampleChoice origin={origin} lots={lots} names={layout ? storedCoefficients(layout) : []} onChange={onOrigin} />
      {sample && "rows" in sample ? (
        <div className="overflow-x-auto">
          <table className="w-full min-w-[690px] text-sm" onMouseLeave={() => onPoint(undefined)}>
            <thead>
              <tr className="border-b border-rule text-left align-bottom">
                <th scope="col" className="py-1.5 pr-3">
                  Field
                </th>
                <th scope="col" className="px-2 text-right">
                  value
                </th>
                <th scope="col" className="pr-3">
                  unit
                </th>
                <th scope="col" className="px-2 text-right">
                  stored
                </th>
                <th scope="col" className="px-2 text-right whitespace-nowrap">
                  read back
                </th>
                <th scope="col" className="pl-2 text-right">
                  rounding
                  <span className="block font-normal text-ink-soft">steps</span>
                </th>
              </tr>
            </thead>
            <tbody>
              {sample.rows.map((row) => (
                <ValueRow key={row.name} row={row} lit={row.path === shown} onPoint={onPoint} />
              ))}
            </tbody>
          </table>
        </div>
      ) : (
        <p className="text-sm text-ink-soft" role="status">
          {sample ? `It can't be encoded: ${sample.refusal}` : "Shown as soon as the text has fields and checksums."}
        </p>
      )}
    </Card>
  );
}

/** Characters that fit a column on one line. */
const LINE = 14;

/** All digits are shown: what is longer than its column goes on in the next line. */
function FigureCell({ text, title }: { text: string; title?: string }) {
  const wrap = text.length > LINE ? "wrap-anywhere" : "whitespace-nowrap";
  return (
    <td className={`px-2 text-right font-mono ${wrap}`} title={title}>
      {text}
    </td>
  );
}

function ValueRow({ row, lit, onPoint }: { row: SampleRow; lit: boolean; onPoint: (path: string) => void }) {
  return (
    <tr
      onMouseEnter={() => onPoint(row.path)}
      className={`border-b border-rule/55 last:border-0 ${lit ? "bg-tint" : ""}`}
    >
      <th scope="row" className="py-1.5 pr-3 text-left font-mono font-normal whitespace-nowrap">
        {row.name}
      </th>
      <FigureCell text={shownValue(row.value, row)} />
      <td className="pr-3 whitespace-nowrap text-ink-soft">
        {row.unit === "1" ? "" : decodedNumber(0, row.unit, row.source).unit}
      </td>
      <FigureCell
        text={row.stored === null ? row.raw.toUpperCase() : formatFigure(row.stored, { digits: 0 })}
        title={row.raw.toUpperCase()}
      />
      <FigureCell text={shownValue(row.readBack, row)} />
      <td className="pl-2 text-right font-mono whitespace-nowrap">{formatFigure(row.roundingSteps, { digits: 2 })}</td>
    </tr>
  );
}

function noteOf({ kind }: SampleOrigin): string {
  if (kind === "invented") return "its values are typical, not measured";
  return kind === "typed" ? "what is left out is invented" : "the newest coefficients of a device";
}

/** Nine digits tell a stored value from its neighbours, as the coarsest have 32 bits. */
function shownValue(value: SampleRow["value"], { unit, raw, source }: SampleRow): string {
  if (typeof value === "string") return formatText(value, raw);
  if (value === null) return "—";
  const shown = decodedNumber(value, unit, source).value;
  return String(Number(shown.toPrecision(9))).replace("-", "−");
}

function storedCoefficients(layout: LayoutDocument): CoefficientName[] {
  const names = layout.fields.flatMap(({ value }) =>
    "from" in value && value.from.startsWith("coefficients.") ? [value.from.slice(13) as CoefficientName] : [],
  );
  return [...new Set(names)];
}
