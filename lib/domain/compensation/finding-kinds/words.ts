import type { Severity } from "../types";

export type Facts = Record<string, unknown>;

export interface Kind {
  severity: Severity;
  /** The sentence people read, from the finding's own data. */
  words: (facts: Facts) => string;
}

/** A number or text of the data as people read it: at most six significant digits. */
export function show(value: unknown): string {
  return typeof value === "number" ? String(Number(value.toPrecision(6))) : String(value);
}

export function ppm(value: unknown): string {
  return typeof value === "number" ? `${show(value * 1e6)} ppm/K` : "unknown";
}

export function percent(value: unknown): string {
  // Cut, not rounded: a share shown must not look larger than it is.
  return typeof value === "number" ? `${Math.floor(value * 1000) / 10} %` : "unknown";
}

/** "this device" or "12 devices", for findings that gather the devices of a run. */
export function devices({ devices: count }: Facts): string {
  return count === 1 ? "one device" : `${count} devices`;
}

/** A coefficient with its unit. */
export function coefficient(name: unknown, value: unknown): string {
  if (name === "gainTc") return ppm(value);
  const unit = name === "zero" ? " mV/V" : name === "zeroTc" ? " mV/V/K" : "";
  return `${show(value)}${unit}`;
}

/** The tests that a value failed, with their figures. */
export function outlierTests({ score, threshold, g, critical }: Facts): string {
  const robust = typeof score === "number" ? [`modified score ${show(score)}, limit ${show(threshold)}`] : [];
  const grubbs = typeof g === "number" ? [`Grubbs G ${show(g)}, critical ${show(critical)}`] : [];
  return [...robust, ...grubbs].join("; ");
}

/** What the two coefficients of temperature mean, which other programs turn round. */
export function signTrap(name: unknown): string {
  return name === "zeroTc"
    ? "zeroTc is the drift itself, not its correction: does the file hold the opposite?"
    : "gainTc is the correction, opposite to the cell's own effect: does the file hold the effect?";
}
