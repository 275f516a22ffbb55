import { Facts } from "@/app/_components/facts";
import { StateMark } from "@/app/_components/state/state-mark";
import { formatPercent } from "@/lib/domain/format/figure";
import { formatQuantity } from "@/lib/domain/format/quantity";

export interface ShownPooled {
  gainTc: number;
  gainTc2?: number;
  sd: number | null;
  n: number;
  meanGain: number;
  confidenceInterval: readonly [number, number] | null;
  toleranceInterval: readonly [number, number] | null;
  coverage: number;
  confidence: number;
  limit: number;
  verdict: "inside" | "outside" | "not-judged";
}

const verdicts = {
  inside: { tone: "good", word: "tolerance interval inside the limit" },
  outside: { tone: "bad", word: "tolerance interval beyond the limit" },
  "not-judged": { tone: "caution", word: "too few devices to judge" },
} as const;

const half = (interval: readonly [number, number] | null) =>
  interval === null ? "—" : `±${formatQuantity("gainTc", (interval[1] - interval[0]) / 2)}`;

/** The lot's gain coefficient with its spread and what it says about the rest of the lot. */
export function PooledFacts({ pooled }: { pooled: ShownPooled }) {
  const { coverage, confidence } = pooled;
  return (
    <div className="flex flex-col gap-2">
      <Facts
        small
        facts={[
          { label: `gainTc, mean of ${pooled.n}, ppm/K`, value: formatQuantity("gainTc", pooled.gainTc) },
          ...(pooled.gainTc2 === undefined
            ? []
            : [{ label: "gainTc2, mean, ppm/K²", value: formatQuantity("gainTc2", pooled.gainTc2) }]),
          { label: "standard deviation, ppm/K", value: formatQuantity("gainTc", pooled.sd) },
          {
            label: `mean known to, ${formatPercent(confidence)} confidence, ppm/K`,
            value: half(pooled.confidenceInterval),
          },
          {
            label: `${formatPercent(coverage)} of the lot within, ${formatPercent(confidence)} confidence, ppm/K`,
            value: half(pooled.toleranceInterval),
          },
          { label: "pooling limit, ppm/K", value: `±${formatQuantity("gainTc", pooled.limit)}` },
          { label: "mean gain of the sample", value: formatQuantity("gain", pooled.meanGain) },
        ]}
      />
      <div>
        <StateMark {...verdicts[pooled.verdict]} />
      </div>
    </div>
  );
}
