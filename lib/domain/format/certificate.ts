/** Certificates of equipment in words. */
export type EquipmentKind = "sensor" | "chamber" | "load" | "reader";

export const EQUIPMENT_NAMES: Record<EquipmentKind, string> = {
  sensor: "Reference sensor",
  chamber: "Climate chamber",
  load: "Load",
  reader: "Reader of the signal",
};

/** Unit of a kind's uncertainty. */
export const UNCERTAINTY_UNITS: Record<EquipmentKind, string> = {
  sensor: "°C",
  chamber: "°C",
  load: "kg",
  reader: "mV/V",
};

const DAY_MS = 86_400_000;
/** From this many days before its date on a certificate counts as due soon: time for most laboratories. */
export const DUE_SOON_DAYS = 30;

export type DueState = "in-date" | "due-soon" | "overdue";

/** Whole days from one date to another, both `YYYY-MM-DD`; negative for a date that is past. */
export function daysUntil(date: string, today: string): number {
  return Math.round((Date.parse(date) - Date.parse(today)) / DAY_MS);
}

/** How a certificate stands on a day; its last day of validity still counts. */
export function dueState(calibratedUntil: string, today: string): DueState {
  const days = daysUntil(calibratedUntil, today);
  if (days < 0) return "overdue";
  return days < DUE_SOON_DAYS ? "due-soon" : "in-date";
}

/** A number with the digits it was entered with, never in powers of ten. */
export function plainDigits(value: number): string {
  return value.toLocaleString("en", { maximumSignificantDigits: 15, useGrouping: false }).replace("-", "\u2212");
}

/** "± 0.02 °C (k = 2)" */
export function formatUncertainty(kind: EquipmentKind, uncertainty: number, coverageFactor: number): string {
  return `± ${plainDigits(uncertainty)} ${UNCERTAINTY_UNITS[kind]} (k = ${plainDigits(coverageFactor)})`;
}
