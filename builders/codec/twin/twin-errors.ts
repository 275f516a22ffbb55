import { type Twin, twinOutput } from "@/builders/codec/twin/twin";
import { spanRatio, zeroShiftRatio } from "@/lib/domain/compensation/envelope";
import { groupByTemperature } from "@/lib/domain/compensation/points";
import type { DevicePoint, FamilyRules, Purpose } from "@/lib/domain/compensation/types";

/** The span error of largest magnitude and where it is. */
export interface TwinSpan {
  /** Signed. */
  errorPpm: number;
  /** Share of the envelope that it uses; ≤ 1 is inside. */
  ratio: number;
  purpose: Purpose;
  point: number;
  chamberC: number;
  /** The part of `errorPpm` that is due to rounding: less what the exact coefficients give at this point. */
  roundingPpm: number | null;
  /** The largest such part over all loaded points, sign-free. */
  largestRoundingPpm: number | null;
}

/** The largest share of the limit at minimum load between neighbouring temperatures, and where it is. */
export interface TwinZero {
  ratio: number;
  betweenC: [from: number, to: number];
  /** What rounding moves the output between the two, as a share of the same limit. */
  roundingRatio: number | null;
}

export interface TwinErrors {
  /** The one of largest magnitude over the loaded points, signed, ppm; null without a loaded point. */
  spanErrorPpm: number | null;
  /** Share of the envelope that it uses; ≤ 1 is inside. */
  spanRatio: number | null;
  /** Largest share of the limit at minimum load between neighbouring temperatures; null below two of them. */
  zeroShiftRatio: number | null;
  /** The same with temperatures and the part of rounding; null where the figures above are. */
  span: TwinSpan | null;
  zero: TwinZero | null;
}

/**
 * The errors that a device will show at the points it was measured at, computed as its firmware does from what its image
 * holds. Span: output loaded less output unloaded, over the nominal output, less 1. Zero: contract, section 3.
 * @param points signals in mV/V, scaled to capacity; temperatures in the device's own unit.
 * @param home the points of the run that gave the zero fit.
 * @param exact the same device with its coefficients before they were stored; without it nothing is said of rounding.
 */
export function twinErrors(
  twin: Twin,
  points: readonly DevicePoint[],
  home: readonly DevicePoint[],
  family: FamilyRules,
  exact: Twin | null = null,
): TwinErrors {
  const span = worstSpan(twin, points, family, exact);
  const zero = worstZero(twin, home, family, exact);
  return {
    spanErrorPpm: span?.errorPpm ?? null,
    spanRatio: span?.ratio ?? null,
    zeroShiftRatio: zero?.ratio ?? null,
    span,
    zero,
  };
}

function worstSpan(
  twin: Twin,
  points: readonly DevicePoint[],
  family: FamilyRules,
  exact: Twin | null,
): TwinSpan | null {
  let worst: { at: DevicePoint; error: number; rounding: number | null } | null = null;
  let largest: number | null = null;
  for (const at of points) {
    const error = spanErrorOf(twin, at, family);
    if (error === null) continue;
    const rounding = exact && error - (spanErrorOf(exact, at, family) as number);
    if (rounding !== null) largest = Math.max(largest ?? 0, Math.abs(rounding));
    if (worst === null || Math.abs(error) > Math.abs(worst.error)) worst = { at, error, rounding };
  }
  if (worst === null) return null;
  const { at, error, rounding } = worst;
  return {
    errorPpm: error * 1e6,
    ratio: spanRatio(error, family),
    purpose: at.purpose,
    point: at.point,
    chamberC: at.chamberC,
    roundingPpm: rounding && rounding * 1e6,
    largestRoundingPpm: largest && largest * 1e6,
  };
}

function spanErrorOf(twin: Twin, { zeroMvV, spanMvV, deviceTemp }: DevicePoint, family: FamilyRules): number | null {
  if (spanMvV === null) return null;
  const output = twinOutput(twin, zeroMvV + spanMvV, deviceTemp) - twinOutput(twin, zeroMvV, deviceTemp);
  return output / family.nominalMvV - 1;
}

function worstZero(twin: Twin, home: readonly DevicePoint[], family: FamilyRules, exact: Twin | null): TwinZero | null {
  const temperatures = groupByTemperature(home);
  const chamber = temperatures.map((group) => meanOf(group, (point) => point.chamberC));
  const output = temperatures.map((group) => unloadedOutput(twin, group));
  let worst: TwinZero | null = null;
  for (let i = 1; i < temperatures.length; i++) {
    const [from, to] = [chamber[i - 1] as number, chamber[i] as number];
    const shift = (output[i] as number) - (output[i - 1] as number);
    const ratio = zeroShiftRatio(shift, to - from, family);
    if (worst !== null && ratio <= worst.ratio) continue;
    worst = { ratio, betweenC: [from, to], roundingRatio: null };
    if (exact === null) continue;
    const [before, after] = [temperatures[i - 1], temperatures[i]] as [DevicePoint[], DevicePoint[]];
    const moved = shift - (unloadedOutput(exact, after) - unloadedOutput(exact, before));
    worst.roundingRatio = zeroShiftRatio(moved, to - from, family);
  }
  return worst;
}

const unloadedOutput = (twin: Twin, points: readonly DevicePoint[]) =>
  meanOf(points, (point) => twinOutput(twin, point.zeroMvV, point.deviceTemp));

function meanOf(points: readonly DevicePoint[], of: (point: DevicePoint) => number): number {
  let sum = 0;
  for (const point of points) sum += of(point);
  return sum / points.length;
}
