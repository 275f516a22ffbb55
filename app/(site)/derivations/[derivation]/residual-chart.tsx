"use client";

import { useState } from "react";
import { Card } from "@/app/_components/card";
import type { ChartTable } from "@/app/_components/chart/chart-table";
import { LineChart, type LineSeries } from "@/app/_components/chart/line-chart";
import { formatCount, formatNumberOf } from "@/lib/domain/format/figure";

export type ResidualQuantity = "zero" | "gain" | "temperature";

export interface ResidualDevice {
  serial: string;
  role: string;
  /** In the unit of the chart; null where the device has none of that kind. */
  residuals: Record<ResidualQuantity, number[] | null>;
  freedom: Record<ResidualQuantity, number>;
}

const kinds: Record<ResidualQuantity, { name: string; axis: string; column: string; digits: number; tells: string }> = {
  zero: {
    name: "Zero",
    axis: "measured less fitted, intervals (v)",
    column: "Residual, v",
    digits: 4,
    tells: "Unloaded output less the fitted zero, in verification intervals.",
  },
  gain: {
    name: "Gain",
    axis: "needed less set, ppm of gain",
    column: "Residual, ppm",
    digits: 1,
    tells:
      "Gain that a loaded point needs less the gain of the set there; for a pooled gainTc this is what the lot's mean leaves.",
  },
  temperature: {
    name: "Thermometer",
    axis: "chamber less fitted, K",
    column: "Residual, K",
    digits: 4,
    tells: "Chamber temperature less the one that the device's own thermometer tells.",
  },
};

/** Residuals of the devices that are drawn by themselves, device by device in the order of their serials. */
export function ResidualChart({ devices, note }: { devices: readonly ResidualDevice[]; note?: string }) {
  const [quantity, setQuantity] = useState<ResidualQuantity>(() => firstTelling(devices));
  const kind = kinds[quantity];
  const shown = devices.filter(({ residuals }) => (residuals[quantity] ?? []).length > 0);
  const free = shown.filter(({ freedom }) => freedom[quantity] > 0);
  return (
    <Card title="Residuals by device" note={note}>
      <fieldset className="m-0 mb-2 flex flex-wrap gap-2 print:hidden">
        <legend className="sr-only">Residuals of what</legend>
        {Object.entries(kinds).map(([id, { name }]) => (
          <button
            key={id}
            type="button"
            aria-pressed={id === quantity}
            onClick={() => setQuantity(id as ResidualQuantity)}
            className={`inline-flex h-[27px] items-center rounded border bg-raised px-[9px] text-sm ${
              id === quantity
                ? "border-copper font-semibold text-copper-strong"
                : "border-rule text-ink-soft hover:border-ink-faint"
            }`}
          >
            {name}
          </button>
        ))}
      </fieldset>
      {free.length === 0 ? (
        <p className="py-8 text-sm text-ink-soft">
          {shown.length === 0
            ? "No device has a residual of this kind."
            : `The fit passes through all points of ${formatNumberOf(shown.length, "device")}: nothing is left that could show its error. A further temperature would.`}
        </p>
      ) : (
        <LineChart
          label={`Residuals of ${kind.name.toLowerCase()}, ${formatNumberOf(free.length, "device")}`}
          xTitle="device, in the order of the serials"
          xWhole
          yTitle={kind.axis}
          yDigits={kind.digits}
          series={seriesOf(free, quantity)}
          table={tableOf(free, quantity)}
          height={250}
        />
      )}
      <p className="mt-1.5 text-xs text-ink-soft">
        {kind.tells}
        {free.length > 0 && free.length < shown.length
          ? ` The fit passes through all points of ${formatCount(shown.length - free.length)} more, which are not drawn.`
          : ""}
      </p>
    </Card>
  );
}

/** The first kind of which something is left after the fit. */
function firstTelling(devices: readonly ResidualDevice[]): ResidualQuantity {
  const order: ResidualQuantity[] = ["zero", "gain", "temperature"];
  return order.find((quantity) => devices.some(({ freedom }) => freedom[quantity] > 0)) ?? "zero";
}

function seriesOf(devices: readonly ResidualDevice[], quantity: ResidualQuantity): LineSeries[] {
  return devices.map(({ serial, role, residuals }, index) => ({
    name: serial,
    group: role,
    tone: role === "verification" ? "copper" : "ink",
    draw: "points",
    points: (residuals[quantity] ?? []).map((value) => [index + 1, value] as const),
  }));
}

function tableOf(devices: readonly ResidualDevice[], quantity: ResidualQuantity): ChartTable {
  const { column, digits } = kinds[quantity];
  return {
    name: `residuals-of-${quantity}`,
    columns: [
      { title: "Serial" },
      { title: "Role" },
      { title: "Point in order", digits: 0 },
      { title: column, digits },
    ],
    rows: devices.flatMap(({ serial, role, residuals }) =>
      (residuals[quantity] ?? []).map((value, index) => [serial, role, index + 1, value]),
    ),
  };
}
