"use client";

import { StepHistogram } from "@/app/_components/chart/step-histogram";
import { formatCount, formatFigure, formatNumberOf } from "@/lib/domain/format/figure";
import { toEngineering } from "@/lib/domain/format/quantity";
import type { ComparisonOverview } from "@/schemas/api/compare";

type Field = ComparisonOverview["fields"][number] & {
  /** One stored step in the field's unit; null where it has none. */
  scale: number | null;
};

/** Charts drawn at once; the rest is opened. */
const DRAWN_AT_ONCE = 4;

/** How the change of each parameter is distributed over the devices. */
export function StepCharts({ fields }: { fields: readonly Field[] }) {
  const drawn = fields.filter((field) => field.histogram !== null);
  if (drawn.length === 0) return null;
  const [first, rest] = [drawn.slice(0, DRAWN_AT_ONCE), drawn.slice(DRAWN_AT_ONCE)];
  return (
    <>
      <Grid fields={first} />
      {rest.length > 0 ? (
        <details className="mt-3">
          <summary className="cursor-pointer text-sm font-semibold">
            {formatNumberOf(rest.length, "more parameter")}
          </summary>
          <Grid fields={rest} />
        </details>
      ) : null}
    </>
  );
}

function Grid({ fields }: { fields: readonly Field[] }) {
  return (
    <div className="mt-2 grid grid-cols-1 gap-x-8 gap-y-4 lg:grid-cols-2">
      {fields.map((field) => (
        <section key={field.name} className="min-w-0">
          <h3 className="text-sm font-semibold">
            {field.name} <span className="font-normal text-ink-soft">in {formatNumberOf(field.devices, "device")}</span>
          </h3>
          <Chart field={field} />
        </section>
      ))}
    </div>
  );
}

function Chart({ field: { name, unit, scale, histogram, devices } }: { field: Field }) {
  if (!histogram) return null;
  const { from, width, counts } = histogram;
  // Steps are shown in the engineering unit where one step has a size; else they are counted.
  const inUnit = histogram.in === "unit" ? 1 : scale;
  const shown = (value: number) => {
    if (inUnit === null) return { value, unit: "steps" };
    return unit === "1" ? { value: value * inUnit * 1e6, unit: "ppm" } : toEngineering(value * inUnit, unit);
  };
  const lower = shown(from);
  const size = shown(width).value;
  const digits = Math.max(0, Math.min(10, 1 - Math.floor(Math.log10(size))));
  const range = `${formatFigure(lower.value, { digits })} to ${formatFigure(lower.value + size * counts.length, { digits })}`;
  const label = `Change of ${name} over ${formatCount(devices)} devices, ${range} ${lower.unit}`;
  return (
    <StepHistogram
      label={label}
      xTitle={[name, lower.unit].filter(Boolean).join(", ")}
      from={lower.value}
      width={size}
      counts={counts}
      digits={digits}
    />
  );
}
