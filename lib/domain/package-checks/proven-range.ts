import { formatCount, formatGiven } from "@/lib/domain/format/figure";
import type { PackageCheck } from "./check";

export interface ProvenRangeFacts {
  /** °C, of the family. */
  temperatureMinC: number;
  temperatureMaxC: number;
  /** °C, of the manifest; null where nothing is proven, or the derivations have no temperature in common. */
  provenRange: readonly [number, number] | null;
  /** Devices whose coefficients rest on no readings of the lot. */
  unprovenDevices: number;
}

const rangeText = ([from, to]: readonly [number, number]) => `${formatGiven(from)} to ${formatGiven(to)} °C`;

/** Whether the temperatures that were measured span those that the family works at. */
export function checkProvenRange(facts: ProvenRangeFacts): PackageCheck {
  const { temperatureMinC: min, temperatureMaxC: max, provenRange, unprovenDevices } = facts;
  const gaps: [number, number][] = [];
  if (!provenRange) gaps.push([min, max]);
  else {
    if (provenRange[0] > min) gaps.push([min, Math.min(provenRange[0], max)]);
    if (provenRange[1] < max) gaps.push([Math.max(provenRange[1], min), max]);
  }
  const family = `The family works from ${rangeText([min, max])}`;
  const where = provenRange ? `proven is ${rangeText(provenRange)}` : "nothing is proven";
  const sentences = [
    gaps.length === 0
      ? `${family}; ${where}.`
      : `${family}; ${where}: nothing is claimed ${gaps.map((gap) => `from ${rangeText(gap)}`).join(" and ")}.`,
  ];
  if (unprovenDevices > 0)
    sentences.push(
      `${unprovenDevices === 1 ? "1 device rests" : `${formatCount(unprovenDevices)} devices rest`} on imported values, proven at no temperature.`,
    );
  return {
    code: "proven-range",
    verdict: gaps.length === 0 && unprovenDevices === 0 ? "pass" : "warn",
    message: sentences.join(" "),
    evidence: { family: [min, max], provenRange, gaps, unprovenDevices },
  };
}
