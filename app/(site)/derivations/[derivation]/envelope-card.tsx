import Link from "next/link";
import { Card } from "@/app/_components/card";
import { LegalNote } from "@/app/_components/legal-note";
import { StateMark } from "@/app/_components/state/state-mark";
import type { EnvelopeSide, EnvelopeSurvey, SpanExtreme, ZeroExtreme } from "@/lib/domain/compensation/survey-envelope";
import type { FamilyRules } from "@/lib/domain/compensation/types";
import { formatCount, formatFigure, formatNumberOf } from "@/lib/domain/format/figure";
import { formatQuantity } from "@/lib/domain/format/quantity";

export interface EnvelopeCardProps {
  derivation: string;
  rules: FamilyRules;
  envelope: EnvelopeSurvey;
}

/** The worst device before and after compensation against the family's class, with the temperature it was found at. */
export function EnvelopeCard({ derivation, rules, envelope }: EnvelopeCardProps) {
  const { accuracyClass, intervals, pLc } = rules;
  const rows = [
    { name: "Span error, before", side: envelope.before, part: "span" as const },
    { name: "Span error, after", side: envelope.after, part: "span" as const },
    { name: "Zero shift, before", side: envelope.before, part: "zero" as const },
    { name: "Zero shift, after", side: envelope.after, part: "zero" as const },
  ];
  return (
    <Card
      title="Worst device against the envelope"
      note={`class ${accuracyClass}, ${formatCount(intervals)} intervals, p_LC ${pLc}`}
    >
      <dl className="flex flex-col text-sm">
        {rows.map(({ name, side, part }) => (
          <div key={name} className="grid gap-x-4 border-b border-rule/55 py-1.5 sm:grid-cols-[9.5rem_1fr]">
            <dt className="font-semibold">{name}</dt>
            <dd className="min-w-0">
              {part === "span" ? (
                <SpanText derivation={derivation} span={side.span} judged={side.spanDevices} />
              ) : (
                <ZeroText derivation={derivation} side={side} accuracyClass={accuracyClass} />
              )}
            </dd>
          </div>
        ))}
      </dl>
      <p className="my-2 text-sm">{notProvenText(envelope.notProvenC)}</p>
      <LegalNote />
    </Card>
  );
}

function Verdict({ ratio, proven }: { ratio: number; proven: boolean }) {
  const share =
    ratio <= 1 ? `${formatQuantity("ratio", ratio)} of the limit` : `${formatQuantity("ratio", ratio)} times the limit`;
  return (
    <>
      <StateMark
        {...(ratio <= 1 ? { tone: "good", word: `inside, ${share}` } : { tone: "bad", word: `outside, ${share}` })}
      />
      {proven ? null : <StateMark tone="caution" word="not proven" title="Outside the measured temperatures" />}
    </>
  );
}

const Device = ({ derivation, serial }: { derivation: string; serial: string }) => (
  <Link href={`/derivations/${derivation}/${encodeURIComponent(serial)}`} className="font-mono">
    {serial}
  </Link>
);

function SpanText({ derivation, span, judged }: { derivation: string; span: SpanExtreme | null; judged: number }) {
  if (!span) return <span className="text-ink-soft">No device could be judged.</span>;
  const tightest = span.stepEnds.reduce((worst, end) => (end.ratio > worst.ratio ? end : worst));
  return (
    <span className="flex flex-wrap items-baseline gap-x-3">
      <Verdict ratio={span.ratio} proven={span.proven} />
      <span>
        <Device derivation={derivation} serial={span.serial} /> at {formatQuantity("temperature", span.chamberC)} °C:{" "}
        {formatQuantity("spanErrorPpm", span.errorPpm, { sign: "always" })} ppm,{" "}
        {formatFigure(tightest.error, { digits: 2, sign: "always" })} v of ±
        {formatFigure(tightest.limit, { digits: 2 })} v at {formatCount(tightest.load)} v; worst of{" "}
        {formatNumberOf(judged, "device")}
      </span>
    </span>
  );
}

function ZeroText({
  derivation,
  side,
  accuracyClass,
}: {
  derivation: string;
  side: EnvelopeSide;
  accuracyClass: FamilyRules["accuracyClass"];
}) {
  const zero: ZeroExtreme | null = side.zero;
  if (!zero)
    return <span className="text-ink-soft">No device could be judged: the fit passes through all points of zero.</span>;
  return (
    <span className="flex flex-wrap items-baseline gap-x-3">
      <Verdict ratio={zero.ratio} proven={zero.proven} />
      <span>
        <Device derivation={derivation} serial={zero.serial} /> from {formatQuantity("temperature", zero.fromC)} to{" "}
        {formatQuantity("temperature", zero.toC)} °C: {formatFigure(zero.shiftIntervals, { digits: 2, sign: "always" })}{" "}
        v; limit p_LC·v_min per {accuracyClass === "A" ? 2 : 5} °C; worst of{" "}
        {formatNumberOf(side.zeroDevices, "device")}
      </span>
    </span>
  );
}

function notProvenText(parts: EnvelopeSurvey["notProvenC"]): string {
  if (parts.length === 0) return "The family's whole temperature range was measured.";
  const named = parts.map(
    ([from, to]) => `${formatFigure(from, { digits: 1 })} to ${formatFigure(to, { digits: 1 })} °C`,
  );
  return `Not proven: ${named.join(" and ")}. Nothing was measured there, and nothing is claimed.`;
}
