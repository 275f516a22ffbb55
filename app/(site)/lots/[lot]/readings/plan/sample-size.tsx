"use client";

import Link from "next/link";
import { useMemo, useState } from "react";
import { Card } from "@/app/_components/card";
import { NumberInput } from "@/app/_components/form/number-input";
import { planSample } from "@/lib/domain/compensation/sample-plan";
import { devicesToShow, shareShown } from "@/lib/domain/compensation/share-shown";
import type { Purpose } from "@/lib/domain/compensation/types";
import { formatFigure, formatNumberOf } from "@/lib/domain/format/figure";
import { formatQuantityWithUnit } from "@/lib/domain/format/quantity";
import { readNumber } from "@/lib/domain/run-plan/point-text";
import type { SamplePlanView } from "@/schemas/api/sample-plan";

type Sizing = Pick<SamplePlanView, "limit" | "coverage" | "confidence" | "earlier">;

/** How many devices a sample or a verification takes, as one types. */
export function SampleSize({ purpose, sizing }: { purpose: Purpose; sizing: Sizing }) {
  return (
    <Card
      title={purpose === "sample" ? "How many sample devices" : "How many verification devices"}
      note={
        purpose === "sample"
          ? `Pooling limit of the family: ±${formatQuantityWithUnit("gainTc", sizing.limit)}`
          : "What passing devices show of the lot"
      }
    >
      {purpose === "sample" ? <SampleQuestion sizing={sizing} /> : <VerificationQuestion sizing={sizing} />}
    </Card>
  );
}

function SampleQuestion({ sizing: { limit, coverage, confidence, earlier } }: { sizing: Sizing }) {
  const [text, setText] = useState(earlier ? formatFigure(earlier.sd * 1e6, { digits: 2 }) : "");
  const ppm = readNumber(text);
  const wrong = text.trim() !== "" && (ppm === undefined || ppm < 0 || ppm > 1e6);
  const plan = useMemo(
    () => (ppm === undefined || wrong ? null : planSample({ sd: ppm * 1e-6, limit, coverage, confidence })),
    [ppm, wrong, limit, coverage, confidence],
  );
  return (
    <div className="grid gap-x-8 gap-y-3 md:grid-cols-[16rem_1fr]">
      <NumberInput
        label="Expected standard deviation of gainTc"
        unit="ppm/K"
        value={text}
        onChange={(event) => setText(event.currentTarget.value)}
        error={wrong ? "Takes a number from 0." : undefined}
        help={
          earlier ? (
            <Earlier earlier={earlier} />
          ) : (
            "No lot of this family was pooled before: estimate, or look at its type test."
          )
        }
      />
      <div className="max-w-[68ch] text-sm" role="status">
        {plan ? (
          <>
            {plan.n === null ? null : <p className="text-lg font-[650]">{formatNumberOf(plan.n, "device")}</p>}
            <p>{plan.words}</p>
          </>
        ) : (
          <p className="text-ink-soft">Say how far gainTc scatters from device to device.</p>
        )}
        <p className="mt-1 text-ink-soft">Fewer than 5 sample devices are refused, whatever they scatter.</p>
      </div>
    </div>
  );
}

function Earlier({ earlier }: { earlier: NonNullable<Sizing["earlier"]> }) {
  return (
    <>
      From the samples of{" "}
      {earlier.lots.map(({ lot, derivation, n }, index) => (
        <span key={lot}>
          {index > 0 ? ", " : ""}
          <Link href={`/derivations/${derivation}`}>{lot}</Link> ({n})
        </span>
      ))}
      , {formatNumberOf(earlier.freedom, "degree")} of freedom.
    </>
  );
}

function VerificationQuestion({ sizing: { confidence } }: { sizing: Sizing }) {
  const [text, setText] = useState("90");
  const percent = readNumber(text);
  const open = percent !== undefined && percent > 0 && percent < 100;
  const n = open ? devicesToShow(percent / 100, confidence) : null;
  // Cut, not rounded: a share shown must not look larger than it is.
  const shown = (count: number) => `${Math.floor(shareShown(count, confidence) * 100)} %`;
  const sure = `${formatFigure(confidence * 100, { digits: 0 })} % confidence`;
  return (
    <div className="grid gap-x-8 gap-y-3 md:grid-cols-[16rem_1fr]">
      <NumberInput
        label="Share of the lot to be shown"
        unit="%"
        value={text}
        onChange={(event) => setText(event.currentTarget.value)}
        error={open ? undefined : "Takes a number above 0 and below 100."}
      />
      <div className="max-w-[68ch] text-sm" role="status">
        {n === null ? null : (
          <>
            <p className="text-lg font-[650]">{formatNumberOf(n, "device")}</p>
            <p>
              {n} of {n} passing show that at least {percent} % of the lot would, at {sure}.
            </p>
          </>
        )}
        <p className="mt-1 text-ink-soft">
          5 of 5 passing show only that at least {shown(5)} would, 10 of 10 {shown(10)}. Drawn at random, and none from
          the sample.
        </p>
      </div>
    </div>
  );
}
