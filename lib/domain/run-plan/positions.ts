/** A rule that labels places: the prefix, then a running number of at least `digits` digits. */
export interface PositionRule {
  prefix: string;
  from: number;
  digits: number;
}

/** What a place in the chamber may be called: what the readings take, and no sign that a spreadsheet reads as a formula. */
export const POSITION_FORM = /^[\p{L}\p{N}][^\p{C}]{0,31}$/u;

/** The label of the place at `index` (0 the first). */
export function positionOf({ prefix, from, digits }: PositionRule, index: number): string {
  return `${prefix.trim()}${String(from + index).padStart(digits, "0")}`;
}

/** Serials put on places in their order. */
export function placeSerials(serials: readonly string[], rule: PositionRule): { serial: string; position: string }[] {
  return serials.map((serial, index) => ({ serial, position: positionOf(rule, index) }));
}
