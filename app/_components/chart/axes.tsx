import type { PlotArea } from "@/app/_components/chart/chart-frame";
import { niceTicks, type Scale } from "@/app/_components/chart/scale";
import { formatFigure } from "@/lib/domain/format/figure";

interface AxisProps {
  area: PlotArea;
  scale: Scale;
  /** Quantity and unit, as "load, intervals". */
  title: string;
  /** Instead of round numbers. */
  ticks?: readonly number[];
  /** Only whole numbers, as of devices in a row. */
  whole?: boolean;
}

export function XAxis({ area, scale, title, ticks: given, whole }: AxisProps) {
  const nice = niceTicks(scale.domain, Math.max(2, (area.right - area.left) / 90));
  const ticks = given ?? (whole ? nice.values.filter(Number.isInteger) : undefined);
  return (
    <g>
      {(ticks ?? nice.values).map((value) => (
        <g key={value}>
          <line
            x1={scale(value)}
            x2={scale(value)}
            y1={area.bottom}
            y2={area.bottom + 4}
            className="stroke-ink-faint"
          />
          <text x={scale(value)} y={area.bottom + 18} textAnchor="middle" className="fill-ink-soft">
            {formatFigure(value, { digits: ticks ? 0 : nice.digits, group: true })}
          </text>
        </g>
      ))}
      <text x={(area.left + area.right) / 2} y={area.bottom + 38} textAnchor="middle" className="fill-ink-soft">
        {title}
      </text>
    </g>
  );
}

export function YAxis({ area, scale, title, whole }: AxisProps) {
  const nice = niceTicks(scale.domain, 5);
  const values = whole ? nice.values.filter(Number.isInteger) : nice.values;
  const digits = whole ? 0 : nice.digits;
  return (
    <g>
      {values.map((value) => (
        <g key={value}>
          <line x1={area.left} x2={area.right} y1={scale(value)} y2={scale(value)} className="stroke-rule" />
          <text x={area.left - 6} y={scale(value) + 4.5} textAnchor="end" className="fill-ink-soft">
            {formatFigure(value, { digits })}
          </text>
        </g>
      ))}
      <text x={area.left} y={13} className="fill-ink-soft">
        {title}
      </text>
    </g>
  );
}
