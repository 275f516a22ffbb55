/** Values of single cells. Each reader gives undefined for what it does not take; the caller names row and column. */

const DECIMAL = /^[+-]?(\d+(\.\d*)?|\.\d+)([eE][+-]?\d{1,3})?$/;
const WHOLE = /^[+-]?\d{1,9}$/;
const SERIAL = /^[A-Za-z0-9][A-Za-z0-9._-]{0,31}$/;
/** Starts with a letter or digit, so that no spreadsheet takes it for a formula when it is exported again. */
const LABEL = /^[\p{L}\p{N}][^\p{C}]{0,63}$/u;
const RFC_3339 = /^(\d{4})-(\d{2})-(\d{2})[Tt](\d{2}):(\d{2}):(\d{2})(?:\.\d{1,9})?(?:[Zz]|[+-](\d{2}):(\d{2}))$/;

/** A finite decimal number with a point, no thousands, no blanks inside. */
export function readDecimal(text: string): number | undefined {
  if (!DECIMAL.test(text)) return undefined;
  const value = Number(text);
  // −0 is 0: a load of −0 kg is no load.
  return Number.isFinite(value) ? value + 0 : undefined;
}

/** An integer of at most nine digits. */
export function readWhole(text: string): number | undefined {
  return WHOLE.test(text) ? Number(text) + 0 : undefined;
}

/** A serial, upper-cased. */
export function readSerial(text: string): string | undefined {
  return SERIAL.test(text) ? text.toUpperCase() : undefined;
}

/** A short label: a place in the chamber, the id of a board. */
export function readLabel(text: string): string | undefined {
  return LABEL.test(text) ? text : undefined;
}

const MONTH_DAYS = [31, 28, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31];

function daysOf(year: number, month: number): number {
  const leap = month === 2 && year % 4 === 0 && (year % 100 !== 0 || year % 400 === 0);
  return (MONTH_DAYS[month - 1] ?? 0) + (leap ? 1 : 0);
}

/** A time from 1970 to 2199 with its offset (RFC 3339), in UTC with milliseconds. */
export function readTime(text: string): string | undefined {
  const parts = RFC_3339.exec(text);
  if (!parts) return undefined;
  const [year, month, day, hour] = [Number(parts[1]), Number(parts[2]), Number(parts[3]), Number(parts[4])];
  if (year < 1970 || year > 2199 || day < 1 || day > daysOf(year, month) || hour > 23) return undefined;
  if (Number(parts[7] ?? 0) > 23 || Number(parts[8] ?? 0) > 59) return undefined;
  // The usual form needs no arithmetic.
  if (text.length === 20 && Number(parts[5]) < 60 && Number(parts[6]) < 60) {
    return `${text.slice(0, 19).toUpperCase()}.000Z`;
  }
  const time = Date.parse(text.toUpperCase());
  return Number.isNaN(time) ? undefined : new Date(time).toISOString();
}
