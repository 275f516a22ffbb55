/** Slices of a long list in its order: what one statement takes, so that neither side is held for long. */
export function* slicesOf<T>(rows: readonly T[], size: number): Generator<T[]> {
  for (let from = 0; from < rows.length; from += size) yield rows.slice(from, from + size);
}
