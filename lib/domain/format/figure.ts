/** U+2212; a hyphen is too short beside figures. */
const minus = "−";
/** Thousands in steps of three with a comma, as everywhere in the product. */
const grouping = /\B(?=(\d{3})+$)/g;

export interface FigureOptions {
  /** Decimals, 0 to 12. */
  digits?: number;
  /** `always` writes + before a positive value: for steps and errors. */
  sign?: "auto" | "always";
  /** Separates thousands before the decimal point. */
  group?: boolean;
}

/**
 * A number in figures with fixed decimals and a true minus sign. A value that rounds to nothing has no sign.
 * @param value any unit; null, undefined and what is not finite become an em dash: a value that has no basis is no 0.
 */
export function formatFigure(value: number | null | undefined, options: FigureOptions = {}): string {
  if (value === null || value === undefined || !Number.isFinite(value)) return "—";
  const { digits = 2, sign = "auto", group = false } = options;
  const rounded = Math.abs(value).toFixed(digits);
  const isZero = Number(rounded) === 0;
  const prefix = isZero ? "" : value < 0 ? minus : sign === "always" ? "+" : "";
  if (!group) return prefix + rounded;
  const [whole = "", decimals] = rounded.split(".");
  return prefix + whole.replace(grouping, ",") + (decimals === undefined ? "" : `.${decimals}`);
}

/** A number with all its digits, as it was given, and a true minus sign. */
export function formatGiven(value: number): string {
  return String(value).replaceAll("-", minus);
}

/** A count with thousands separated: 12,500. */
export function formatCount(value: number | null | undefined): string {
  return formatFigure(value, { digits: 0, group: true });
}

/** A count with its noun: `formatNumberOf(1, "device")` is "1 device", 2 gives "2 devices". */
export function formatNumberOf(count: number, singular: string, plural = `${singular}s`): string {
  return `${formatCount(count)} ${count === 1 ? singular : plural}`;
}

/** A share 0…1 in per cent. */
export function formatPercent(share: number | null | undefined, digits = 0): string {
  if (share === null || share === undefined) return "—";
  return `${formatFigure(share * 100, { digits })} %`;
}
