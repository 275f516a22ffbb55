const months = ["Jan", "Feb", "Mar", "Apr", "May", "Jun", "Jul", "Aug", "Sep", "Oct", "Nov", "Dec"];

const two = (part: number): string => String(part).padStart(2, "0");

/**
 * A moment as "9 Mar 2026, 14:12 UTC".
 * @param at RFC 3339 text or a Date; what is no moment becomes an em dash.
 */
export function formatDateTime(at: string | Date | null | undefined): string {
  const moment = momentOf(at);
  if (!moment) return "—";
  return `${formatDate(moment)}, ${two(moment.getUTCHours())}:${two(moment.getUTCMinutes())} UTC`;
}

/** The UTC day of a moment as "9 Mar 2026". */
export function formatDate(at: string | Date | null | undefined): string {
  const moment = momentOf(at);
  if (!moment) return "—";
  return `${moment.getUTCDate()} ${months[moment.getUTCMonth()]} ${moment.getUTCFullYear()}`;
}

/** A span of time in its two largest parts: "45 s", "3 min 20 s", "2 h 5 min", "3 d 4 h". */
export function formatDuration(seconds: number | null | undefined): string {
  if (seconds === null || seconds === undefined || !Number.isFinite(seconds) || seconds < 0) return "—";
  const whole = Math.round(seconds);
  if (whole < 60) return `${whole} s`;
  if (whole < 3_600) return joined(Math.floor(whole / 60), "min", whole % 60, "s");
  if (whole < 86_400) return joined(Math.floor(whole / 3_600), "h", Math.floor((whole % 3_600) / 60), "min");
  return joined(Math.floor(whole / 86_400), "d", Math.floor((whole % 86_400) / 3_600), "h");
}

function joined(large: number, largeUnit: string, small: number, smallUnit: string): string {
  return small === 0 ? `${large} ${largeUnit}` : `${large} ${largeUnit} ${small} ${smallUnit}`;
}

function momentOf(at: string | Date | null | undefined): Date | undefined {
  if (at === null || at === undefined) return undefined;
  const moment = typeof at === "string" ? new Date(at) : at;
  return Number.isNaN(moment.getTime()) ? undefined : moment;
}
