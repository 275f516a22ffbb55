import { FindingsList, type ShownFinding } from "@/app/_components/findings-list";
import { type ComparableResult, derivationEffect } from "@/lib/domain/compensation/derivation-effect";
import { formatCount, formatFigure } from "@/lib/domain/format/figure";
import { formatQuantity } from "@/lib/domain/format/quantity";

export interface EffectProps {
  /** What the preview is held against. */
  name: string;
  before: ComparableResult;
  after: ComparableResult;
}

const VERDICTS = { inside: "inside the limit", outside: "beyond the limit", "not-judged": "too few to judge" };

/** What other options change in the result: the lot's gain coefficient, the verdicts, findings that come and go. */
export function Effect({ name, before, after }: EffectProps) {
  const { gained, lost, complete } = derivationEffect(before, after);
  return (
    <section aria-label="What these options change" className="my-4">
      <h4 className="mb-1.5 font-semibold">What these options change</h4>
      <table className="w-full max-w-3xl text-sm">
        <thead>
          <tr className="text-xs text-ink-soft">
            <th scope="col" className={`${cell} text-left`}>
              What
            </th>
            <th scope="col" className={`${cell} text-right`}>
              {name}
            </th>
            <th scope="col" className={`${cell} text-right`}>
              With these options
            </th>
            <th scope="col" className={`${cell} text-right`}>
              Change
            </th>
          </tr>
        </thead>
        <tbody>
          {rowsOf(before, after).map(([what, was, is, step]) => (
            <tr key={what} className={was === is ? "text-ink-soft" : ""}>
              <th scope="row" className={`${cell} text-left font-normal`}>
                {what}
              </th>
              <td className={`${cell} text-right font-mono`}>{was}</td>
              <td className={`${cell} text-right font-mono`}>{is}</td>
              <td className={`${cell} text-right font-mono`}>{step}</td>
            </tr>
          ))}
        </tbody>
      </table>
      <div className="mt-3 grid gap-4 lg:grid-cols-2">
        <FindingsChange title="Findings that come" findings={gained} none="No finding comes." />
        <FindingsChange title="Findings that go" findings={lost} none="No finding goes." />
      </div>
      {complete ? null : (
        <p className="mt-2 text-sm text-ochre">
          There are more findings than a reply carries: these two lists are not complete, the counts are.
        </p>
      )}
    </section>
  );
}

const cell = "border-b border-rule/55 px-2 py-1 first:pl-0 last:pr-0";

type Line = [what: string, was: string, is: string, step: string];

function rowsOf(before: ComparableResult, after: ComparableResult): Line[] {
  const ppm = (value: number | null | undefined) => formatQuantity("gainTc", value);
  const stepPpm = (was: number | null | undefined, is: number | null | undefined) =>
    typeof was === "number" && typeof is === "number" ? formatQuantity("gainTc", is - was, { sign: "always" }) : "";
  const quantity = (what: string, was: number | null | undefined, is: number | null | undefined): Line => [
    what,
    ppm(was),
    ppm(is),
    stepPpm(was, is),
  ];
  const count = (what: string, was: number, is: number): Line => [
    what,
    formatCount(was),
    formatCount(is),
    is === was ? "" : formatFigure(is - was, { digits: 0, sign: "always", group: true }),
  ];
  const [a, b] = [before.pooled, after.pooled];
  const half = (interval: readonly [number, number] | null | undefined) =>
    interval ? (interval[1] - interval[0]) / 2 : null;
  const word = (result: ComparableResult) => (result.pooled ? VERDICTS[result.pooled.verdict] : "not pooled");
  const passed = ({ verification }: ComparableResult) => verification.filter((one) => one.passed).length;
  const { findings: was } = before.counts;
  const { findings: is } = after.counts;
  return [
    ...(a || b
      ? [
          quantity("gainTc, mean of the sample, ppm/K", a?.gainTc, b?.gainTc),
          quantity("standard deviation s, ppm/K", a?.sd, b?.sd),
          quantity("tolerance interval, ±, ppm/K", half(a?.toleranceInterval), half(b?.toleranceInterval)),
          count("sample devices", a?.n ?? 0, b?.n ?? 0),
          ["verdict on pooling", word(before), word(after), ""] as Line,
        ]
      : []),
    count("verification devices inside", passed(before), passed(after)),
    count("devices with coefficients", before.counts.withValues, after.counts.withValues),
    count("findings that block", was.hard, is.hard),
    count("findings that need a reason", was.soft, is.soft),
    count("notes", was.note, is.note),
  ];
}

function FindingsChange({ title, findings, none }: { title: string; findings: readonly ShownFinding[]; none: string }) {
  return (
    <div className="min-w-0">
      <h5 className="mb-1 text-sm font-semibold">
        {title} {findings.length > 0 ? `(${formatCount(findings.length)})` : ""}
      </h5>
      <FindingsList findings={findings} empty={none} />
    </div>
  );
}
