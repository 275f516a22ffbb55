import { Facts } from "@/app/_components/facts";
import { StateMark } from "@/app/_components/state/state-mark";
import { formatFigure, formatNumberOf, formatPercent } from "@/lib/domain/format/figure";
import { formatQuantity } from "@/lib/domain/format/quantity";

export interface ShownPooled {
  gainTc: number;
  gainTc2?: number;
  sd: number | null;
  n: number;
  meanGain: number;
  confidenceInterval: readonly [number, number] | null;
  toleranceInterval: readonly [number, number] | null;
  toleranceFactor?: number | null;
  coverage: number;
  confidence: number;
  limit: number;
  verdict: "inside" | "outside" | "not-judged";
  /** Share of the lot within the limit of the mean, at the confidence. */
  shareExpected?: number | null;
  /** The same, were mean and deviation the lot's own. */
  shareEstimate?: number | null;
  /** Sample devices in all with which this deviation would come out inside. */
  sampleNeeded?: number | null;
}

const verdicts = {
  inside: { tone: "good", word: "tolerance interval inside the limit" },
  outside: { tone: "bad", word: "tolerance interval beyond the limit" },
  "not-judged": { tone: "caution", word: "too few devices to judge" },
} as const;

const half = (interval: readonly [number, number] | null) =>
  interval === null ? "—" : `±${formatQuantity("gainTc", (interval[1] - interval[0]) / 2)}`;

/** Cut, not rounded: a share shown must not look larger than it is. */
const atLeast = (share: number) => `${formatFigure(Math.min(99.9, Math.floor(share * 1000) / 10), { digits: 1 })} %`;

/** The lot's gain coefficient with its spread and what it says about the rest of the lot. */
export function PooledFacts({ pooled }: { pooled: ShownPooled }) {
  const { coverage, confidence, toleranceFactor } = pooled;
  const factor = toleranceFactor ? `, k = ${formatFigure(toleranceFactor, { digits: 3 })}` : "";
  return (
    <div className="flex flex-col gap-2">
      <Facts
        small
        facts={[
          { label: `gainTc, mean of ${pooled.n}, ppm/K`, value: formatQuantity("gainTc", pooled.gainTc) },
          ...(pooled.gainTc2 === undefined
            ? []
            : [{ label: "gainTc2, mean, ppm/K²", value: formatQuantity("gainTc2", pooled.gainTc2) }]),
          { label: "standard deviation s, ppm/K", value: formatQuantity("gainTc", pooled.sd) },
          {
            label: `mean known to, ${formatPercent(confidence)} confidence, ppm/K`,
            value: half(pooled.confidenceInterval),
          },
          {
            label: `${formatPercent(coverage)} of the lot within, ${formatPercent(confidence)} confidence${factor}, ppm/K`,
            value: half(pooled.toleranceInterval),
          },
          { label: "pooling limit, ppm/K", value: `±${formatQuantity("gainTc", pooled.limit)}` },
          { label: "mean gain of the sample", value: formatQuantity("gain", pooled.meanGain) },
        ]}
      />
      <div>
        <StateMark {...verdicts[pooled.verdict]} />
      </div>
      <ShareText pooled={pooled} />
    </div>
  );
}

/** What the sample says about the devices that were not in it, and how many more would settle it. */
function ShareText({ pooled }: { pooled: ShownPooled }) {
  const { n, confidence, shareExpected, shareEstimate, sampleNeeded, verdict } = pooled;
  if (shareExpected === undefined && sampleNeeded === undefined) return null;
  return (
    <div className="flex flex-col gap-1 text-sm">
      {typeof shareExpected === "number" ? (
        <p>
          At least {atLeast(shareExpected)} of the lot is expected inside the limit, with {formatPercent(confidence)}{" "}
          confidence
          {typeof shareEstimate === "number"
            ? `; were mean and s those of the whole lot, it would be ${shareEstimate > 0.999 ? "over " : ""}${atLeast(shareEstimate)}`
            : ""}
          . A normal spread is assumed, and that the sample was drawn at random.
        </p>
      ) : null}
      {verdict !== "inside" && sampleNeeded !== undefined ? <p>{neededText(n, sampleNeeded)}</p> : null}
    </div>
  );
}

function neededText(n: number, needed: number | null): string {
  if (needed === null)
    return "No number of sample devices would bring this spread inside the limit: trim the devices one by one, or find out why they differ.";
  const more = Math.max(0, needed - n);
  return more === 0
    ? `With this s, ${formatNumberOf(n, "sample device")} would do.`
    : `With this s, ${formatNumberOf(more, "more sample device")} would be needed, ${needed} in all.`;
}
