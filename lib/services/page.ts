/** One page of a list; `next` is the cursor of the following page, null at the end. */
export interface Page<T> {
  items: T[];
  next: string | null;
}

/**
 * Cuts a page from rows of which one more than asked for was read.
 * @param rows at most limit + 1 rows in the list's order.
 * @param cursorOf the value the next page starts after.
 */
export function pageOf<T>(rows: readonly T[], limit: number, cursorOf: (row: T) => string): Page<T> {
  const items = rows.slice(0, limit);
  const last = items.at(-1);
  return { items, next: rows.length > limit && last !== undefined ? cursorOf(last) : null };
}
