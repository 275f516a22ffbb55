import { type FittedDevice, isBlocked } from "./device-fit";
import type { Method } from "./types";

/** Statements reach this far beyond the temperatures measured, K. */
const MARGIN_K = 2;

function toHundredths(value: number): number {
  return Math.round(value * 100) / 100;
}

/**
 * Where a derivation's statements are proven: from 2 K below the lowest to 2 K above the highest temperature of what
 * gave gainTc, to 0.01 K. Pooled: over the sample devices that entered the mean. Individual: the narrowest over the
 * devices with coefficients; if these have nothing in common, `common` is false and the range is a single temperature.
 * @returns range null where no device got coefficients.
 */
export function provenRange(
  devices: readonly FittedDevice[],
  method: Method,
): { range: [number, number] | null; common: boolean } {
  const individual = method === "individual";
  let low = individual ? Number.NEGATIVE_INFINITY : Number.POSITIVE_INFINITY;
  let high = -low;
  let any = false;
  for (const { result, trim } of devices) {
    any ||= result.coefficients !== null;
    const [from, to] = result.measuredRangeC;
    if (individual && result.coefficients) {
      low = Math.max(low, from);
      high = Math.min(high, to);
    } else if (!individual && result.role === "sample" && trim && !isBlocked(result)) {
      low = Math.min(low, from);
      high = Math.max(high, to);
    }
  }
  if (!any || !Number.isFinite(low)) return { range: null, common: true };
  low = toHundredths(low - MARGIN_K);
  high = toHundredths(high + MARGIN_K);
  return low <= high ? { range: [low, high], common: true } : { range: [low, low], common: false };
}
