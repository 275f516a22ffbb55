import { formatFigure, formatGiven } from "@/lib/domain/format/figure";
import { toEngineering } from "@/lib/domain/format/quantity";

/** A stored field as people read it. */
export interface FieldText {
  text: string;
  /** Empty where there is none, or where the value is a plain ratio. */
  unit: string;
}

/** Decimals in the engineering unit; the same as elsewhere for the same quantity. */
const DIGITS: Record<string, number> = {
  "µV/V": 3,
  "nV/V/K": 2,
  "nV/V/K²": 4,
  "ppm/K": 2,
  "ppm/K²": 4,
  "°C": 3,
  "1": 6,
};
const MOST_DIGITS = 10;
/** Digits that tell any single-precision value from its neighbours. */
const SIGNIFICANT = 9;

/**
 * A decoded field in its engineering unit: 1/K as ppm/K, mV/V as µV/V. Texts and values without a unit stand as they are.
 * @param value as decoded; null where the bytes hold no value.
 * @param digits at least so many decimals, where a difference would else be rounded away.
 */
export function formatField(value: number | string | null, unit: string | null, digits = 0): FieldText {
  if (value === null) return { text: "no value", unit: "" };
  if (typeof value === "string") return { text: value, unit: "" };
  const shown = toEngineering(value, unit);
  const shownUnit = shown.unit === "1" ? "" : shown.unit;
  const base = DIGITS[shown.unit];
  if (base === undefined && digits === 0) return { text: plain(shown.value), unit: shownUnit };
  return { text: formatFigure(shown.value, { digits: Math.max(base ?? 0, digits) }), unit: shownUnit };
}

/** A field as decoded from an image. */
export interface DecodedText {
  value: number | string | null;
  unit: string | null;
  /** Stored bytes, lower-case hex. */
  raw: string;
  /** Where its value comes from; null for constants. */
  source: string | null;
}

/** A stored number in the unit that people read it in. The nominal output stays in mV/V, as the family has it. */
export function decodedNumber(
  value: number,
  unit: string | null | undefined,
  source: string | null,
): { value: number; unit: string } {
  return source === "family.nominalOutput" ? { value, unit: unit ?? "" } : toEngineering(value, unit);
}

/** A decoded field as people read it, as {@link formatField}; what only its bytes and its source tell is told too. */
export function formatDecoded({ value, unit, raw, source }: DecodedText): FieldText {
  if (typeof value === "string") return { text: formatText(value, raw), unit: "" };
  // Seven digits are what binary32 keeps of it.
  if (typeof value === "number" && source === "family.nominalOutput")
    return { text: formatGiven(Number(value.toPrecision(7))), unit: unit === "1" ? "" : (unit ?? "") };
  return formatField(value, unit);
}

/** A decoded text: hex digits in capitals as all stored bytes, a negative 64-bit integer with a true minus sign. */
export function formatText(value: string, raw: string): string {
  if (value === raw) return value.toUpperCase();
  return isNegative64(value, raw) ? value.replace("-", "−") : value;
}

function isNegative64(value: string, raw: string): boolean {
  if (raw.length !== 16 || !/^-\d{1,19}$/.test(value)) return false;
  const bytes = BigInt.asUintN(64, BigInt(value)).toString(16).padStart(16, "0");
  return raw === bytes || raw === (bytes.match(/../g) ?? []).reverse().join("");
}

export interface FieldChange {
  /** Null where the image had no such field. */
  from: number | string | null;
  to: number | string | null;
  unit: string | null;
  /** Difference of the stored integers; null where there is none. */
  steps: number | null;
}

/** Texts of a change: both values, their unit, the step in that unit (ratios in ppm) and in stored steps. */
export interface FieldChangeText {
  from: string | null;
  to: string | null;
  unit: string;
  step?: string;
  lsb?: string;
}

/**
 * A change of one field in words and figures, with as many decimals as it takes to see it.
 * @param least a difference in the field's unit whose decimals are used instead, so that a column of them lines up.
 */
export function formatFieldChange({ from, to, unit, steps }: FieldChange, least?: number): FieldChangeText {
  const difference = typeof from === "number" && typeof to === "number" ? to - from : null;
  const seen = least ?? difference;
  const digits = seen === null ? 0 : digitsToSee(toEngineering(seen, unit).value);
  const text = (value: number | string | null) => (value === null ? null : formatField(value, unit, digits).text);
  const known = typeof to === "number" ? to : from;
  return {
    from: text(from),
    to: text(to),
    unit: formatField(known, unit).unit,
    step: difference === null ? undefined : stepText(difference, unit, seen ?? difference),
    lsb: steps === null ? undefined : formatFigure(steps, { digits: 0, sign: "always", group: true }),
  };
}

/** Two significant digits of the difference; none for what is whole. */
function digitsToSee(difference: number): number {
  if (difference === 0 || Number.isInteger(difference)) return 0;
  return Math.min(MOST_DIGITS, Math.max(0, 1 - Math.floor(Math.log10(Math.abs(difference)))));
}

function stepText(difference: number, unit: string | null, seen: number): string | undefined {
  if (unit === null) return undefined;
  const inUnit = (value: number) => (unit === "1" ? { value: value * 1e6, unit: "ppm" } : toEngineering(value, unit));
  const shown = inUnit(difference);
  const digits = Math.max(2, digitsToSee(inUnit(seen).value));
  // Less than the decimals can show: two significant digits of it are seen all the same.
  if (shown.value !== 0 && Math.abs(shown.value) < 10 ** (1 - digits) && digits === MOST_DIGITS) {
    const sign = shown.value > 0 ? "+" : "";
    return `${sign}${shown.value.toExponential(1).replaceAll("-", "−")} ${shown.unit}`;
  }
  return `${formatFigure(shown.value, { digits, sign: "always" })} ${shown.unit}`;
}

function plain(value: number): string {
  if (Number.isInteger(value)) return formatFigure(value, { digits: 0 });
  const size = Math.abs(value);
  if (size < 1e-6 || size >= 1e9) return value.toExponential(SIGNIFICANT - 1).replaceAll("-", "−");
  // As many decimals for all values of a size, so that a column of them lines up.
  return formatFigure(value, { digits: Math.max(0, SIGNIFICANT - 1 - Math.floor(Math.log10(size))) });
}
