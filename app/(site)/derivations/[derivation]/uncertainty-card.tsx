import { Card } from "@/app/_components/card";
import { ScrollRegion } from "@/app/_components/scroll-region";
import { formatFigure, formatPercent } from "@/lib/domain/format/figure";
import { formatQuantity } from "@/lib/domain/format/quantity";

interface Effects {
  gainTc: number | null;
  zeroTc: number | null;
  intervals: number | null;
}

interface Line extends Effects {
  source: string;
  words: string;
  distribution: string;
  value: number | null;
  unit: string;
  standard: number | null;
  df: number | null;
  within: string | null;
}

export interface ShownBudget {
  formula: string;
  level: number;
  atC: number | null;
  lines: readonly Line[];
  combined: Effects;
  degreesOfFreedom: Effects;
  coverageFactor: Effects;
  expanded: Effects;
  missing: readonly string[];
  chamber: { words: string };
}

const head = "border-b border-rule px-2 py-1.5 text-right text-xs font-semibold text-ink-soft first:pl-0 last:pr-0";
const cell = "border-b border-rule/55 px-2 py-1.5 text-right align-top font-mono first:pl-0 last:pr-0";

/** What the coefficients and the output are uncertain by, source by source, and how the sources are combined. */
export function UncertaintyCard({ budget }: { budget: ShownBudget }) {
  const { combined, degreesOfFreedom, coverageFactor, expanded } = budget;
  return (
    <Card
      title="Uncertainty budget"
      note={
        budget.atC === null ? undefined : `error at capacity stated at ${formatFigure(budget.atC, { digits: 1 })} °C`
      }
    >
      <ScrollRegion label="Uncertainty budget" className="overflow-x-auto">
        <table className="w-full text-sm">
          <thead>
            <tr>
              <th scope="col" className={`${head} text-left`}>
                Source
              </th>
              <th scope="col" className={head}>
                known as
              </th>
              <th scope="col" className={head}>
                standard
              </th>
              <th scope="col" className={head} title="Degrees of freedom; ∞ where the value is taken as known">
                freedom
              </th>
              <th scope="col" className={head} title="The correction of gain">
                gainTc <span className="block font-normal">ppm/K</span>
              </th>
              <th scope="col" className={head} title="The drift of zero">
                zeroTc <span className="block font-normal">nV/V/K</span>
              </th>
              <th scope="col" className={head}>
                error at capacity <span className="block font-normal">v</span>
              </th>
            </tr>
          </thead>
          <tbody>
            {budget.lines.map((line) => (
              <BudgetLine key={line.source} line={line} />
            ))}
            <Sum name="Combined standard uncertainty" effects={combined} freedom={degreesOfFreedom} />
            <tr>
              <th scope="row" colSpan={4} className={`${cell} text-left font-sans font-normal`}>
                Coverage factor, {formatPercent(budget.level)}
              </th>
              <td className={cell}>{formatFigure(coverageFactor.gainTc, { digits: 2 })}</td>
              <td className={cell}>{formatFigure(coverageFactor.zeroTc, { digits: 2 })}</td>
              <td className={cell}>{formatFigure(coverageFactor.intervals, { digits: 2 })}</td>
            </tr>
            <Sum name={`Expanded uncertainty, ${formatPercent(budget.level)}`} effects={expanded} strong />
          </tbody>
        </table>
      </ScrollRegion>
      <p className="mt-3 text-sm">{budget.formula}</p>
      <p className="mt-2 text-sm">{budget.chamber.words}</p>
      {budget.missing.length > 0 ? (
        <p className="mt-2 text-sm text-ochre">
          Nothing is known on {budget.missing.join(", ")}: left out of the sums.
        </p>
      ) : null}
    </Card>
  );
}

function BudgetLine({ line }: { line: Line }) {
  const own = (value: number | null) =>
    value === null ? "—" : `${significant(value)}${line.unit === "1" ? "" : ` ${line.unit}`}`;
  return (
    <tr>
      <th scope="row" className={`${cell} max-w-[26rem] min-w-[14rem] text-left font-sans font-normal`}>
        {line.words}
        {line.within ? (
          <span className="block text-xs text-ink-soft">contained in {line.within}, not added again</span>
        ) : null}
      </th>
      <td className={`${cell} whitespace-nowrap`} title={line.distribution}>
        {own(line.value)}
      </td>
      <td className={`${cell} whitespace-nowrap`}>{own(line.standard)}</td>
      <td className={cell}>{line.standard === null ? "—" : freedomText(line.df)}</td>
      <EffectCells effects={line} />
    </tr>
  );
}

function Sum({
  name,
  effects,
  freedom,
  strong,
}: {
  name: string;
  effects: Effects;
  freedom?: Effects;
  strong?: boolean;
}) {
  return (
    <tr className={strong ? "font-semibold" : ""}>
      <th scope="row" colSpan={4} className={`${cell} text-left font-sans ${strong ? "" : "font-normal"}`}>
        {name}
        {freedom ? (
          <span className="block text-xs font-normal text-ink-soft">
            effective degrees of freedom {freedomText(freedom.gainTc)}, {freedomText(freedom.zeroTc)},{" "}
            {freedomText(freedom.intervals)}
          </span>
        ) : null}
      </th>
      <EffectCells effects={effects} />
    </tr>
  );
}

function EffectCells({ effects }: { effects: Effects }) {
  return (
    <>
      <td className={cell}>{formatQuantity("gainTc", effects.gainTc, { digits: 3 })}</td>
      <td className={cell}>{formatQuantity("zeroTc", effects.zeroTc, { digits: 3 })}</td>
      <td className={cell}>{formatFigure(effects.intervals, { digits: 3 })}</td>
    </>
  );
}

const freedomText = (df: number | null) => (df === null ? "∞" : formatFigure(df, { digits: df < 10 ? 1 : 0 }));

/** Three significant figures: what a standard uncertainty is worth. */
function significant(value: number): string {
  if (value === 0) return "0";
  const digits = 2 - Math.floor(Math.log10(Math.abs(value)));
  return formatFigure(value, { digits: Math.min(12, Math.max(0, digits)) });
}
