/** Any JSON object. */
export type Loose = Record<string, unknown>;

export function isObject(value: unknown): value is Loose {
  return typeof value === "object" && value !== null && !Array.isArray(value);
}

/** A whole number from `min` to `max`, both included. */
export function isCount(value: unknown, min: number, max: number): boolean {
  return Number.isInteger(value) && (value as number) >= min && (value as number) <= max;
}

/** Two offsets into an image. */
export function isRange(value: unknown): boolean {
  return Array.isArray(value) && value.length === 2 && value.every((end) => isCount(end, 0, 65535));
}

export function isByteOrder(value: unknown): boolean {
  return value === "little" || value === "big";
}
