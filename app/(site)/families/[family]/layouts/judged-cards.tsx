"use client";

import { useMemo } from "react";
import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { MemoryMap } from "@/app/_components/memory-map";
import { StateMark } from "@/app/_components/state/state-mark";
import type { Tone } from "@/app/_components/state/tone";
import type { LintOptions } from "@/builders/codec/lint/lint";
import type { Resolution } from "@/builders/codec/lint/lint-resolution";
import { findMends } from "@/builders/codec/mend/find-mend";
import type { Mend } from "@/builders/codec/mend/mend-context";
import { formatFigure, formatNumberOf } from "@/lib/domain/format/figure";
import { toEngineering } from "@/lib/domain/format/quantity";
import type { Step, StepReason } from "@/lib/domain/semver-step";
import type { Problem } from "@/lib/errors";
import type { Judged } from "./judge-text";
import type { Sample } from "./sample/encode-sample";

interface MemoryCardProps {
  judged: Judged;
  sample: Sample | null;
  shown?: string | undefined;
  onPoint?: (path: string | undefined) => void;
  onChoose?: (path: string) => void;
}

/** The EEPROM as the text has it, with the sample device's bytes. */
export function MemoryCard({ judged: { memory }, sample, shown, onPoint, onChoose }: MemoryCardProps) {
  const note = memory
    ? `${formatNumberOf(memory.bytes, "byte")} in pages of ${memory.pageBytes}, ${memory.used} in use${sample ? ` · bytes of ${sample.serial}` : ""}`
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
          {...(shown !== undefined && { shown })}
          {...(onPoint && { onPoint: (part) => onPoint(part?.path) })}
          {...(onChoose && { onChoose: ({ path }) => path && onChoose(path) })}
        />
      ) : (
        <p className="text-sm text-ink-soft">The map is drawn as soon as the text has memory, fields and checksums.</p>
      )}
    </Card>
  );
}

interface LintListProps {
  judged: Judged;
  basis: LintOptions;
  /** Left out where nothing may be changed. */
  onMend?: (mend: Mend) => void;
  /** Brings the place of a finding into sight. */
  onShow?: (path: string) => void;
}

/** What stands against the layout, what its author should look at, and how fine the coefficients are stored. */
export function LintList({ judged, basis, onMend, onShow }: LintListProps) {
  const { errors, warnings, resolutions, text } = judged;
  const title = `${errors.length === 0 ? "No errors" : formatNumberOf(errors.length, "error")}, ${
    warnings.length === 0 ? "no warnings" : formatNumberOf(warnings.length, "warning")
  }`;
  const mends = useMemo(
    () => findMends([...errors.slice(0, SHOWN), ...warnings.slice(0, SHOWN)], text, basis),
    [errors, warnings, text, basis],
  );
  const row = (tone: Tone, word: string) => (problem: Problem) => {
    const mend = mends.get(problem);
    const key = problem.path + problem.code + problem.message;
    return (
      <LintRow key={key} problem={problem} tone={tone} word={word} onShow={onShow}>
        {mend && onMend ? <Button onClick={() => onMend(mend)}>{mend.label}</Button> : null}
      </LintRow>
    );
  };
  const coarse = new Set(warnings.filter((one) => one.code === "field.scale_coarse").map((one) => one.path));
  return (
    <Card title={title} look={errors.length > 0 ? "bad" : "plain"}>
      <p role="status" className="sr-only">
        {title}
      </p>
      <ul>
        {errors.slice(0, SHOWN).map(row("bad", "mend"))}
        {warnings.slice(0, SHOWN).map(row("caution", "look"))}
        {resolutions
          .filter(({ path }) => !coarse.has(`${path}/scale`))
          .map((one) => (
            <ResolutionRow key={one.path} resolution={one} />
          ))}
      </ul>
      {errors.length > SHOWN || warnings.length > SHOWN ? (
        <p className="mt-2 text-sm text-ink-soft">
          The first {SHOWN} of each are shown; mend them and the others come.
        </p>
      ) : null}
    </Card>
  );
}

/** Findings shown at once: a text that is broken throughout need not fill the page. */
const SHOWN = 30;

interface LintRowProps {
  problem: Problem;
  tone: Tone;
  word: string;
  onShow: ((path: string) => void) | undefined;
  children: React.ReactNode;
}

function LintRow({ problem, tone, word, onShow, children }: LintRowProps) {
  return (
    <li className="flex flex-wrap items-center gap-x-4 gap-y-1 border-b border-rule/55 py-2 text-sm last:border-0">
      <span className="w-16 flex-none">
        <StateMark tone={tone} word={word} />
      </span>
      <span className="min-w-[180px] flex-1">{problem.message}</span>
      {onShow && problem.path ? (
        <button
          type="button"
          title="Shows it in the text"
          onClick={() => onShow(problem.path)}
          className="font-mono text-xs text-slate underline underline-offset-3"
        >
          {problem.path}
        </button>
      ) : (
        <span className="font-mono text-xs text-ink-soft">{problem.path}</span>
      )}
      {children}
    </li>
  );
}

function ResolutionRow({ resolution: { name, step, unit, vMin, overK } }: { resolution: Resolution }) {
  const shown = toEngineering(step, unit);
  const over = /Tc/.test(name) && overK > 0 ? ` over ${formatFigure(overK, { digits: 0 })} K` : "";
  return (
    <li className="flex flex-wrap items-center gap-x-4 border-b border-rule/55 py-2 text-sm last:border-0">
      <span className="w-16 flex-none">
        <StateMark tone="good" word="fits" title="One step moves the output by less than a tenth of v_min" />
      </span>
      <span className="flex-1">
        {name}: one step is {plainNumber(shown.value)}
        {shown.unit === "1" ? "" : ` ${shown.unit}`}
      </span>
      <span className="text-ink-soft" title="Change of the output in minimum verification intervals v_min">
        {plainNumber(vMin)} v_min{over}
      </span>
    </li>
  );
}

/** Two digits, as 9 × 10⁻⁸ below a thousandth. */
function plainNumber(value: number): string {
  if (value >= 1e-3 && value < 1e4) return String(Number(value.toPrecision(2)));
  const [digits = "", exponent = ""] = value.toExponential(1).replace(".0e", "e").split("e");
  return `${digits} × 10${[...String(Number(exponent))].map((sign) => superscripts[sign] ?? sign).join("")}`;
}

const superscripts: Record<string, string> = {
  "-": "⁻",
  ...Object.fromEntries([..."⁰¹²³⁴⁵⁶⁷⁸⁹"].map((sign, digit) => [String(digit), sign])),
};

const stepWords: Record<Step, string> = {
  major: "firmware for the old layout would misread the new image",
  minor: "something is only added, or the firmware range narrowed",
  patch: "texts and limits only",
};

interface DifferencesProps {
  /** Version that is compared with. */
  against: string | null;
  reasons: readonly StepReason[];
  step: Step | null;
  /** Choice of another version. */
  choice?: React.ReactNode;
  /** There is nothing to tell yet. */
  waiting?: boolean;
}

/** What differs from another version, member by member, and which step that asks for. */
export function Differences({ against, reasons, step, choice, waiting = false }: DifferencesProps) {
  if (against === null || (step === null && !waiting)) return null;
  const title = `Against ${against}${step === null ? "" : `: ${reasons.length === 0 ? "the same" : step}`}`;
  return (
    <Card title={title} note={step && reasons.length > 0 ? stepWords[step] : undefined} aside={choice}>
      {waiting ? (
        <p className="text-sm text-ink-soft">Told as soon as both texts are there.</p>
      ) : reasons.length === 0 ? (
        <p className="text-sm text-ink-soft">Nothing but the version differs.</p>
      ) : null}
      <ul>
        {reasons.map((reason) => (
          <li
            key={reason.path + reason.message}
            className="flex flex-wrap items-baseline gap-x-4 border-b border-rule/55 py-1.5 text-sm last:border-0"
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
