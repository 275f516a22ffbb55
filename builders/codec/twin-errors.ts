import { type Twin, twinOutput } from "@/builders/codec/twin";
import { spanRatio, zeroShiftRatio } from "@/lib/domain/compensation/envelope";
import { groupByTemperature } from "@/lib/domain/compensation/points";
import type { DevicePoint, FamilyRules } from "@/lib/domain/compensation/types";

export interface TwinErrors {
  /** The one of largest magnitude over the loaded points, signed, ppm; null without a loaded point. */
  spanErrorPpm: number | null;
  /** Share of the envelope that it uses; ≤ 1 is inside. */
  spanRatio: number | null;
  /** Largest share of the limit at minimum load between neighbouring temperatures; null below two of them. */
  zeroShiftRatio: number | null;
}

/**
 * The errors that a device will show at the points it was measured at, computed as its firmware does from what its image
 * holds. Span: output loaded less output unloaded, over the nominal output, less 1. Zero: contract, section 3.
 * @param points signals in mV/V, scaled to capacity; temperatures in the device's own unit.
 * @param home the points of the run that gave the zero fit.
 */
export function twinErrors(
  twin: Twin,
  points: readonly DevicePoint[],
  home: readonly DevicePoint[],
  family: FamilyRules,
): TwinErrors {
  let worst: number | null = null;
  for (const { zeroMvV, spanMvV, deviceTemp } of points) {
    if (spanMvV === null) continue;
    const output = twinOutput(twin, zeroMvV + spanMvV, deviceTemp) - twinOutput(twin, zeroMvV, deviceTemp);
    const error = output / family.nominalMvV - 1;
    if (worst === null || Math.abs(error) > Math.abs(worst)) worst = error;
  }
  return {
    spanErrorPpm: worst === null ? null : worst * 1e6,
    spanRatio: worst === null ? null : spanRatio(worst, family),
    zeroShiftRatio: largestZeroShift(twin, home, family),
  };
}

function largestZeroShift(twin: Twin, home: readonly DevicePoint[], family: FamilyRules): number | null {
  const mean = (values: readonly number[]) => values.reduce((sum, value) => sum + value, 0) / values.length;
  const temperatures = groupByTemperature(home).map((group) => ({
    chamberC: mean(group.map((point) => point.chamberC)),
    output: mean(group.map((point) => twinOutput(twin, point.zeroMvV, point.deviceTemp))),
  }));
  let worst: number | null = null;
  temperatures.slice(1).forEach((at, i) => {
    const before = temperatures[i] as (typeof temperatures)[number];
    const ratio = zeroShiftRatio(at.output - before.output, at.chamberC - before.chamberC, family);
    worst = Math.max(worst ?? 0, ratio);
  });
  return worst;
}
