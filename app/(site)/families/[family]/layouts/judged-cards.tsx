import { Card } from "@/app/_components/card";
import { MemoryMap } from "@/app/_components/memory-map";
import { StateMark } from "@/app/_components/state/state-mark";
import type { Tone } from "@/app/_components/state/tone";
import { formatFigure, formatNumberOf } from "@/lib/domain/format/figure";
import type { Step } from "@/lib/domain/semver-step";
import type { Problem } from "@/lib/errors";
import type { Judged, SampleRow } from "./judge-text";

/** The EEPROM as the text has it, with the sample device's bytes. */
export function MemoryCard({ judged: { memory, sample } }: { judged: Judged }) {
  const note = memory
    ? `${formatNumberOf(memory.bytes, "byte")} in pages of ${memory.pageBytes}, ${memory.used} in use${sample ? ` · bytes of the invented device ${sample.serial}` : ""}`
    : undefined;
  return (
    <Card title="Memory" note={note}>
      {memory ? (
        <MemoryMap
          bytes={memory.bytes}
          pageBytes={memory.pageBytes}
          parts={memory.parts}
          hex={sample?.hex}
          label="Memory map"
        />
      ) : (
        <p className="text-sm text-ink-soft">The map is drawn as soon as the text has memory, fields and checksums.</p>
      )}
    </Card>
  );
}

/** What stands against the layout, and what its author should look at. */
export function LintList({ judged: { errors, warnings } }: { judged: Judged }) {
  const title = `${errors.length === 0 ? "No errors" : formatNumberOf(errors.length, "error")}, ${
    warnings.length === 0 ? "no warnings" : formatNumberOf(warnings.length, "warning")
  }`;
  return (
    <Card title={title} look={errors.length > 0 ? "bad" : "plain"}>
      <ul aria-live="polite">
        {errors.map((error) => (
          <LintRow key={error.path + error.code + error.message} problem={error} tone="bad" word="mend" />
        ))}
        {warnings.map((warning) => (
          <LintRow key={warning.path + warning.code + warning.message} problem={warning} tone="caution" word="look" />
        ))}
      </ul>
      {errors.length === 0 && warnings.length === 0 ? (
        <p className="text-sm text-ink-soft">
          Every value fits its field, nothing overlaps, every coefficient has a place.
        </p>
      ) : null}
    </Card>
  );
}

function LintRow({ problem, tone, word }: { problem: Problem; tone: Tone; word: string }) {
  return (
    <li className="flex flex-wrap items-baseline gap-x-4 border-b border-rule py-2 text-sm last:border-0">
      <span className="w-16 flex-none">
        <StateMark tone={tone} word={word} />
      </span>
      <span className="min-w-0 flex-1">{problem.message}</span>
      <span className="font-mono text-xs text-ink-soft">{problem.path}</span>
    </li>
  );
}

const stepWords: Record<Step, string> = {
  major: "firmware for the old layout would misread the new image",
  minor: "something is only added, or the firmware range narrowed",
  patch: "texts and limits only",
};

/** Why the version has to step as it does. */
export function Differences({ judged: { previous, reasons, step } }: { judged: Judged }) {
  if (previous === null || step === null) return null;
  return (
    <Card title={`Against ${previous}: ${step}`} note={stepWords[step]}>
      {reasons.length === 0 ? <p className="text-sm text-ink-soft">Nothing but the version differs.</p> : null}
      <ul>
        {reasons.map((reason) => (
          <li
            key={reason.path + reason.message}
            className="flex flex-wrap items-baseline gap-x-4 border-b border-rule py-1.5 text-sm last:border-0"
          >
            <span className="w-16 flex-none font-semibold">{reason.step}</span>
            <span className="min-w-0 flex-1">{reason.message}</span>
            <span className="font-mono text-xs text-ink-soft">{reason.path}</span>
          </li>
        ))}
      </ul>
    </Card>
  );
}

/** The sample device's values, as stored and as the firmware reads them back. */
export function SampleCard({ judged: { sample } }: { judged: Judged }) {
  return (
    <Card title="Sample, encoded and read back" note="an invented device; its values are typical, not measured">
      {sample ? (
        <div className="overflow-x-auto">
          <table className="w-full min-w-[480px] text-sm whitespace-nowrap">
            <thead>
              <tr className="border-b border-rule text-left">
                <th scope="col" className="py-1.5 pr-3">
                  Field
                </th>
                <th scope="col" className="px-3 text-right">
                  value
                </th>
                <th scope="col" className="px-3">
                  unit
                </th>
                <th scope="col" className="px-3">
                  stored, hex
                </th>
                <th scope="col" className="px-3 text-right">
                  read back
                </th>
                <th scope="col" className="pl-3 text-right">
                  rounding
                  <span className="block font-normal text-ink-soft">steps</span>
                </th>
              </tr>
            </thead>
            <tbody>
              {sample.rows.map((row) => (
                <tr key={row.name} className="border-b border-rule last:border-0">
                  <th scope="row" className="py-1.5 pr-3 text-left font-mono font-normal">
                    {row.name}
                  </th>
                  <td className="max-w-[160px] truncate px-3 text-right font-mono">{valueText(row.value)}</td>
                  <td className="px-3 text-ink-soft">{row.unit ?? ""}</td>
                  <td className="max-w-[132px] truncate px-3 font-mono" title={row.raw}>
                    {row.raw.toUpperCase()}
                  </td>
                  <td className="max-w-[160px] truncate px-3 text-right font-mono">{valueText(row.readBack)}</td>
                  <td className="pl-3 text-right font-mono">{roundingText(row)}</td>
                </tr>
              ))}
            </tbody>
          </table>
        </div>
      ) : (
        <p className="text-sm text-ink-soft">Shown as soon as the layout can be encoded without doubt.</p>
      )}
    </Card>
  );
}

function valueText(value: SampleRow["value"]): string {
  return typeof value === "number" ? String(Number(value.toPrecision(9))).replace("-", "−") : (value ?? "—");
}

const roundingText = ({ roundingSteps }: SampleRow) => formatFigure(roundingSteps, { digits: 2 });
