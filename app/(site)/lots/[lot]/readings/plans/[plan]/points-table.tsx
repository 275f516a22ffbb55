import { ScrollRegion } from "@/app/_components/scroll-region";
import { formatFigure } from "@/lib/domain/format/figure";
import type { PlannedPoint } from "@/lib/domain/run-plan/run-plan";

const HEADINGS = ["Point", "Set point, °C", "Soak, min", "Loads, kg", "Dwell, s", "Repeats"];

/** A figure with the decimals it has. */
export const plainFigure = (value: number) =>
  formatFigure(value, { digits: Math.min(6, String(value).split(".")[1]?.length ?? 0) });

/** A plan's temperatures in working order. */
export function PointsTable({ points }: { points: readonly PlannedPoint[] }) {
  return (
    <ScrollRegion label="Temperatures and loads" className="overflow-x-auto print:overflow-visible">
      <table className="w-full min-w-[520px] max-w-[760px]">
        <thead>
          <tr>
            {HEADINGS.map((name) => (
              <th
                key={name}
                scope="col"
                className="border-b border-rule px-3 py-1.5 text-right text-xs font-semibold text-ink-soft"
              >
                {name}
              </th>
            ))}
          </tr>
        </thead>
        <tbody className="font-mono text-sm">
          {points.map((one) => (
            <tr key={one.point} className="border-b border-rule/55 last:border-0">
              <td className="px-3 py-1 text-right">{plainFigure(one.point)}</td>
              <td className="px-3 py-1 text-right">{plainFigure(one.setC)}</td>
              <td className="px-3 py-1 text-right">{plainFigure(one.soakMin)}</td>
              <td className="px-3 py-1 text-right">{["0", ...one.loadsKg.map(plainFigure)].join("  ")}</td>
              <td className="px-3 py-1 text-right">{one.loadsKg.length > 0 ? plainFigure(one.dwellS) : "—"}</td>
              <td className="px-3 py-1 text-right">{plainFigure(one.repeats)}</td>
            </tr>
          ))}
        </tbody>
      </table>
    </ScrollRegion>
  );
}
