import { AppError } from "@/lib/errors";

const SERIAL = /^[A-Z0-9][A-Z0-9._-]{0,31}$/;

/** A rule that numbers serials: the prefix, then a number of at least `digits` digits. */
export interface SerialRule {
  prefix: string;
  /** First number, ≥ 0. */
  from: number;
  /** How many serials, ≥ 1. */
  count: number;
  /** Least number of digits, zeros in front, 1 to 12. */
  digits: number;
}

/**
 * The serials of a numbering rule, rising.
 * @throws AppError `serials.rule_invalid` {field} where it numbers nothing or gives what is no serial.
 */
export function numberSerials({ prefix, from, count, digits }: SerialRule): string[] {
  assertWhole("from", from, 0, 999_999_999_999);
  assertWhole("count", count, 1, 60_000);
  assertWhole("digits", digits, 1, 12);
  const head = prefix.trim().toUpperCase();
  const serials = Array.from({ length: count }, (_, i) => `${head}${String(from + i).padStart(digits, "0")}`);
  const bad = [serials[0], serials.at(-1)].find((serial) => serial === undefined || !SERIAL.test(serial));
  if (bad !== undefined) {
    const message = `${bad} is no serial: 1 to 32 of A–Z, 0–9, dot, hyphen and underscore, a letter or digit first.`;
    throw new AppError("serials.rule_invalid", { field: "prefix", message });
  }
  return serials;
}

function assertWhole(field: keyof SerialRule, value: number, min: number, max: number): void {
  if (Number.isInteger(value) && value >= min && value <= max) return;
  const message = `Takes a whole number from ${min.toLocaleString("en")} to ${max.toLocaleString("en")}.`;
  throw new AppError("serials.rule_invalid", { field, message });
}

export interface ReadSerials {
  /** Each once, in the order given, trimmed and upper-cased. */
  serials: string[];
  /** What can't be a serial, as given, with its line from 1. */
  refused: { line: number; text: string }[];
  /** How often a serial stood there again. */
  repeated: number;
}

/** Serials from pasted text: one a line, or parted by spaces, commas, semicolons or tabs. */
export function readSerials(text: string): ReadSerials {
  const seen = new Set<string>();
  const refused: ReadSerials["refused"] = [];
  let repeated = 0;
  text.split(/\r\n|\r|\n/).forEach((lineText, index) => {
    for (const part of lineText.split(/[\s,;]+/)) {
      if (part === "") continue;
      const serial = part.toUpperCase();
      if (!SERIAL.test(serial)) refused.push({ line: index + 1, text: part });
      else if (seen.has(serial)) repeated += 1;
      else seen.add(serial);
    }
  });
  return { serials: [...seen], refused, repeated };
}
