import { Card } from "@/app/_components/card";
import { ScrollRegion } from "@/app/_components/scroll-region";
import { formatFigure, formatPercent } from "@/lib/domain/format/figure";
import { formatQuantity, toEngineering } from "@/lib/domain/format/quantity";

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
  chamber: { words: string };
}

const head = "border-b border-rule px-2 py-1.5 text-xs font-semibold text-ink-soft first:pl-0 last:pr-0";
const cell = "border-b border-rule/55 px-2 py-1.5 align-top first:pl-0 last:pr-0";
const figure = `${cell} text-right font-mono whitespace-nowrap`;
const heading = `${cell} text-left`;

/** A source that another one holds already, in words. */
const CONTAINED: Record<string, string> = { "sample.scatter": "the scatter of the sample" };

/** What the coefficients and the output are uncertain by, source by source, and how the sources are combined. */
export function UncertaintyCard({ budget }: { budget: ShownBudget }) {
  const { combined, degreesOfFreedom, coverageFactor, expanded } = budget;
  const known = budget.lines.filter((line) => line.standard !== null);
  const unknown = [...new Set(budget.lines.filter((line) => line.standard === null).map((line) => line.words))];
  return (
    <Card
      title="Uncertainty budget"
      note={
        budget.atC === null ? undefined : `error at capacity stated at ${formatFigure(budget.atC, { digits: 1 })} °C`
      }
    >
      <ScrollRegion label="Uncertainty budget" className="relative overflow-x-auto">
        <table className="paper-table w-full text-sm">
          <thead>
            <tr>
              <th scope="col" className={`${head} text-left`}>
                Source
              </th>
              <th scope="col" className={`${head} text-right`}>
                known as
              </th>
              <th scope="col" className={`${head} text-right`}>
                standard
              </th>
              <th
                scope="col"
                className={`${head} text-right`}
                title="Degrees of freedom; ∞ where the value is taken as known"
              >
                freedom
              </th>
              <th scope="col" className={`${head} text-right`} title="The correction of gain">
                gainTc <span className="block font-normal">ppm/K</span>
              </th>
              <th scope="col" className={`${head} text-right`} title="The drift of zero">
                zeroTc <span className="block font-normal">nV/V/K</span>
              </th>
              <th scope="col" className={`${head} text-right`}>
                error at capacity <span className="block font-normal">v</span>
              </th>
            </tr>
          </thead>
          <tbody>
            {known.map((line) => (
              <BudgetLine key={line.source} line={line} />
            ))}
            <Sum name="Combined standard uncertainty" effects={combined} freedom={degreesOfFreedom} />
            <tr>
              <th scope="row" colSpan={4} className={`${heading} font-normal`}>
                Coverage factor, {formatPercent(budget.level)}
              </th>
              <td className={figure}>{formatFigure(coverageFactor.gainTc, { digits: 2 })}</td>
              <td className={figure}>{formatFigure(coverageFactor.zeroTc, { digits: 2 })}</td>
              <td className={figure}>{formatFigure(coverageFactor.intervals, { digits: 2 })}</td>
            </tr>
            <Sum name={`Expanded uncertainty, ${formatPercent(budget.level)}`} effects={expanded} strong />
          </tbody>
        </table>
      </ScrollRegion>
      <p className="mt-3 text-sm">{budget.formula}</p>
      <p className="mt-2 text-sm">{budget.chamber.words}</p>
      {unknown.length > 0 ? (
        <div className="mt-3 border-l-2 border-ochre pl-3 text-sm">
          <p className="font-semibold text-ochre">Not known, and so left out of the sums</p>
          <ul>
            {unknown.map((words) => (
              <li key={words}>{words}</li>
            ))}
          </ul>
        </div>
      ) : null}
    </Card>
  );
}

function BudgetLine({ line }: { line: Line }) {
  const own = (value: number | null) => {
    if (value === null) return "—";
    const shown = toEngineering(value, line.unit);
    return `${significant(shown.value)}${shown.unit === "1" ? "" : ` ${shown.unit}`}`;
  };
  return (
    <tr>
      <th scope="row" className={`${heading} max-w-[28rem] min-w-[14rem] font-normal`}>
        {line.words}
        {line.within ? (
          <span className="block text-xs text-ink-soft">
            contained in {CONTAINED[line.within] ?? "another line"}, not added again
          </span>
        ) : null}
      </th>
      <td className={figure} title={line.distribution}>
        {own(line.value)}
      </td>
      <td className={figure}>{own(line.standard)}</td>
      <td className={figure}>{line.standard === null ? "—" : freedomText(line.df)}</td>
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
      <th scope="row" colSpan={4} className={`${heading} ${strong ? "" : "font-normal"}`}>
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
      <td className={figure}>{formatQuantity("gainTc", effects.gainTc, { digits: 3 })}</td>
      <td className={figure}>{formatQuantity("zeroTc", effects.zeroTc, { digits: 3 })}</td>
      <td className={figure}>{formatFigure(effects.intervals, { digits: 3 })}</td>
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
