import Link from "next/link";
import { Card } from "@/app/_components/card";
import { ScrollRegion } from "@/app/_components/scroll-region";
import { formatCount, formatFigure } from "@/lib/domain/format/figure";
import { formatQuantity } from "@/lib/domain/format/quantity";
import { formatDateTime } from "@/lib/domain/format/time";
import type { ComparisonSide, DerivationComparison } from "@/schemas/api/derivation-comparison";

type Line = [what: string, from: string, to: string];

const VERDICTS = { inside: "inside the limit", outside: "beyond the limit", "not-judged": "too few to judge" };

const half = (interval: readonly [number, number] | null | undefined) =>
  interval ? `±${formatQuantity("gainTc", (interval[1] - interval[0]) / 2)}` : "—";

function textsOf(side: ComparisonSide): Record<string, string> {
  const { pooled, findings, provenRange } = side;
  return {
    method: side.method,
    order: String(side.order),
    runs: side.runs.map((run) => `${run.purpose} of ${formatDateTime(run.createdAt)}`).join("; ") || "none",
    "devices left out": side.exclude.map(({ serial, reason }) => `${serial}: ${reason}`).join("; ") || "none",
    arithmetic: side.method === "import" ? "from a file" : side.engine,
    "proven range, °C": provenRange
      ? `${formatFigure(provenRange[0], { digits: 2 })} to ${formatFigure(provenRange[1], { digits: 2 })}`
      : "nothing proven",
    "gainTc, mean of the sample, ppm/K": formatQuantity("gainTc", pooled?.gainTc),
    "standard deviation s, ppm/K": formatQuantity("gainTc", pooled?.sd),
    "tolerance interval, ppm/K": half(pooled?.toleranceInterval),
    "sample devices": pooled ? formatCount(pooled.n) : "—",
    "verdict on pooling": pooled ? VERDICTS[pooled.verdict] : "—",
    "devices with coefficients": `${formatCount(side.withValues)} of ${formatCount(side.devices)}`,
    "findings that block, need a reason, notes": `${findings.hard}, ${findings.soft}, ${findings.note}`,
    state: side.state.replaceAll("-", " "),
    "made by": side.createdBy,
  };
}

/** Method, runs, options and results of both, what differs in full ink. */
export function FactsOfBoth({ comparison: { from, to } }: { comparison: DerivationComparison }) {
  const [was, is] = [textsOf(from), textsOf(to)];
  const lines = Object.keys(was).map((what): Line => [what, was[what] ?? "", is[what] ?? ""]);
  return (
    <Card title="What they rest on and what they give" note="What differs is marked">
      <ScrollRegion label="Facts of both derivations" className="relative overflow-x-auto">
        <table className="w-full text-sm">
          <thead>
            <tr className="text-xs text-ink-soft">
              <th scope="col" className={`${cell} text-left`}>
                What
              </th>
              {[from, to].map((side) => (
                <th key={side.id} scope="col" className={`${cell} text-left`}>
                  <Link href={`/derivations/${side.id}`}>{formatDateTime(side.createdAt)}</Link>
                </th>
              ))}
            </tr>
          </thead>
          <tbody>
            {lines.map(([what, a, b]) => (
              <tr key={what} className={a === b ? "text-ink-soft" : "font-semibold"}>
                <th scope="row" className={`${cell} text-left font-normal text-ink-soft`}>
                  {what}
                </th>
                <td className={cell}>{a}</td>
                <td className={cell}>
                  {a === b ? null : <span className="sr-only">differs: </span>}
                  {b}
                  {a === b ? null : (
                    <span aria-hidden="true" className="text-copper">
                      {" "}
                      ≠
                    </span>
                  )}
                </td>
              </tr>
            ))}
          </tbody>
        </table>
      </ScrollRegion>
    </Card>
  );
}

const cell = "min-w-[11rem] border-b border-rule/55 px-2 py-1.5 align-top first:pl-0 last:pr-0";
