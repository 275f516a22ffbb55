import { describe, expect, it } from "vitest";
import { PRINTED_MAX, printedNote, printedStretches } from "@/app/_components/table/printed-rows";

const rows = (count: number, from = 0) => Array.from({ length: count }, (_, at) => ({ serial: from + at }));
/** A list of which only some windows are loaded. */
function windows(length: number, ...loaded: [from: number, count: number][]) {
  const list = Array.from<{ serial: number } | undefined>({ length });
  for (const [from, count] of loaded) list.splice(from, count, ...rows(count, from));
  return list;
}
const shape = (list: readonly (object | undefined)[], most?: number) =>
  printedStretches(list as never, most).map(({ from, rows }) => [from, rows.length]);

describe("printedStretches", () => {
  it("takes all rows of a list that is loaded, up to the bound", () => {
    expect(shape(rows(3))).toEqual([[0, 3]]);
    expect(shape(rows(PRINTED_MAX))).toEqual([[0, PRINTED_MAX]]);
    expect(shape(rows(PRINTED_MAX + 1))).toEqual([[0, PRINTED_MAX]]);
    expect(shape([])).toEqual([]);
  });

  it("keeps apart what is loaded in windows, holes and undefined alike, and counts only what is there", () => {
    expect(shape(windows(50_028, [0, 200], [24_800, 600]))).toEqual([
      [0, 200],
      [24_800, 600],
    ]);
    expect(shape([undefined, { a: 1 }, undefined, { a: 2 }], 1)).toEqual([[1, 1]]);
  });

  it("keeps each row in its place", () => {
    const [, second] = printedStretches(windows(1_000, [0, 2], [500, 2]));
    expect(second?.rows).toEqual([{ serial: 500 }, { serial: 501 }]);
  });
});

describe("printedNote", () => {
  const note = (list: readonly (object | undefined)[], total: number | null, filter?: string) =>
    printedNote(printedStretches(list as never), total, filter);

  it("is silent where the whole list is on paper", () => {
    expect(note(rows(2_000), 2_000)).toBeUndefined();
    expect(note([], 0)).toBeUndefined();
  });

  it("names the rows, of how many, and what to do", () => {
    expect(note(rows(50_028), 50_028)).toBe("Rows 1 to 2,000 of 50,028: export the table for all");
    expect(note(rows(500), 2_000)).toBe("Rows 1 to 500 of 2,000: export the table for all");
    expect(note(rows(1), 2)).toBe("Row 1 of 2: export the table for all");
  });

  it("names every stretch of a list that is loaded in windows", () => {
    const words = "Rows 1 to 200 and 24,801 to 25,400 of 50,028: export the table for all";
    expect(note(windows(50_028, [0, 200], [24_800, 600]), 50_028)).toBe(words);
    const three = "Rows 1, 3 and 5 to 6 of 7: export the table for all";
    expect(note(windows(7, [0, 1], [2, 1], [4, 2]), 7)).toBe(three);
  });

  it("does not claim a length that nobody told", () => {
    expect(note(rows(500), null)).toBe("Rows 1 to 500, and there are more: export the table for all");
    expect(note([], null)).toBe("No row was loaded: export the table for all");
    expect(note(windows(90), 90)).toBe("No row was loaded of 90: export the table for all");
  });

  it("says that a filter left rows out, whole or not", () => {
    expect(note(rows(12), 12, "“With findings”")).toBe("Only rows that pass “With findings”. 12 of them.");
    expect(note(rows(2_400), 2_400, "“0001”")).toBe(
      "Only rows that pass “0001”. Rows 1 to 2,000 of 2,400: export the table for all",
    );
  });
});
