import { Card } from "@/app/_components/card";
import { StateMark } from "@/app/_components/state/state-mark";
import { DataTable } from "@/app/_components/table/data-table";
import { devicesToShow, shareShown, shareShownWithFailures } from "@/lib/domain/compensation/share-shown";
import { formatFigure, formatNumberOf, formatPercent } from "@/lib/domain/format/figure";
import type { DerivationView } from "@/schemas/api/derivations";

/** Longer lists are closed at first, unless one of the devices is outside. */
const OPEN_MAX = 12;

const JUDGED_BY: Record<string, string> = { spanRatio: "span error", zeroShiftRatio: "zero shift" };

export interface VerificationCardProps {
  derivation: string;
  results: DerivationView["verification"];
  /** Of the family, 0…1. */
  confidence: number;
  coverage: number;
}

/** Devices that never fed the gain coefficient, judged with it. Nothing where there is none. */
export function VerificationCard({ derivation, results, confidence, coverage }: VerificationCardProps) {
  if (results.length === 0) return null;
  const judged = results.filter((one) => one.passed !== null);
  const passed = judged.filter((one) => one.passed).length;
  return (
    <Card title="Verification" note="Devices that never fed the lot's gainTc, judged with it">
      <div className="mb-3 flex flex-wrap items-baseline gap-x-4 gap-y-1 text-sm">
        <StateMark {...verdictOf(passed, judged.length)} />
        <p className="min-w-0">{shownText(passed, judged.length, confidence, coverage)}</p>
      </div>
      {results.length > OPEN_MAX ? (
        <details open={passed < judged.length}>
          <summary className="w-max text-sm text-slate hover:text-copper-strong">
            The {formatNumberOf(results.length, "device")}, one by one
          </summary>
          <div className="mt-2">
            <Results derivation={derivation} results={results} />
          </div>
        </details>
      ) : (
        <Results derivation={derivation} results={results} />
      )}
    </Card>
  );
}

function Results({ derivation, results }: Pick<VerificationCardProps, "derivation" | "results">) {
  return (
    <DataTable
      name="verification devices"
      urlName="verification"
      rows={results.map((one) => ({
        ...one,
        judged: one.judged.map((ratio) => JUDGED_BY[ratio] ?? ratio).join(", "),
      }))}
      rowKey="serial"
      rowHref={`/derivations/${derivation}/{serial}`}
      columns={[
        { key: "serial", header: "Serial", format: { as: "code" } },
        {
          key: "spanErrorPpm",
          header: "Span error",
          format: { as: "quantity", name: "spanErrorPpm", sign: "always" },
        },
        { key: "spanRatio", header: "Span", format: { as: "quantity", name: "ratio" } },
        { key: "zeroShiftRatio", header: "Zero shift", format: { as: "quantity", name: "ratio" } },
        { key: "judged", header: "Judged by" },
        { key: "passed", header: "Verdict", format: { as: "yes-no", yes: "inside", no: "outside" } },
      ]}
      empty={{ title: "No verification device" }}
    />
  );
}

function verdictOf(passed: number, judged: number) {
  if (judged === 0) return { tone: "caution", word: "none could be judged" } as const;
  const word = `${passed} of ${judged} inside`;
  return passed === judged ? ({ tone: "good", word } as const) : ({ tone: "bad", word } as const);
}

/** What the count really shows: no more than luck allows. */
function shownText(passed: number, judged: number, confidence: number, coverage: number): string {
  if (judged === 0) return "No verification device has a loaded reading beside the ones its gain was taken from.";
  // Cut, not rounded: a share shown must not look larger than it is.
  const cut = (share: number) => formatFigure(Math.floor(share * 1000) / 10, { digits: 1 });
  if (passed < judged)
    return (
      "One outside is enough to doubt the pooled coefficient: find out what sets it apart. " +
      `${passed} of ${judged} passing shows only that at least ${cut(shareShownWithFailures(passed, judged, confidence))} % of ` +
      `the lot would (${formatPercent(confidence)} confidence).`
    );
  const share = cut(shareShown(judged, confidence));
  const needed = devicesToShow(coverage, confidence);
  return (
    `${passed} of ${judged} passing shows at least ${share} % of the lot at ${formatPercent(confidence)} confidence, and no more. ` +
    `To show ${formatPercent(coverage)}, ${formatNumberOf(needed, "device")} would have to pass, all of them.`
  );
}
