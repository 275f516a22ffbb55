import { describe, expect, it } from "vitest";
import { type ColumnTexts, longestWord, paperWidth } from "@/app/_components/table/paper-width";

const mono = (longest: number, heading = 1): ColumnTexts => ({ mono: true, longest, word: longest, heading });
const text = (longest: number, word: number, heading = 1): ColumnTexts => ({ mono: false, longest, word, heading });

describe("paperWidth", () => {
  it("gives a figure room for all of itself", () => {
    const added = paperWidth([mono(22)]) - paperWidth([mono(12)]);
    // An advance of the figures' face is 0.618 of its size.
    expect(added).toBeGreaterThanOrEqual(10 * 0.618);
    expect(added).toBeLessThan(10 * 0.7);
  });

  it("lets texts wrap, but not within a word", () => {
    expect(paperWidth([text(400, 9)])).toBe(paperWidth([text(40, 9)]));
    expect(paperWidth([text(400, 40)])).toBeGreaterThan(paperWidth([text(400, 9)]));
    expect(paperWidth([text(5, 5)])).toBeLessThan(paperWidth([text(40, 9)]));
  });

  it("holds the longest word of a heading", () => {
    expect(paperWidth([mono(2, 14)])).toBeGreaterThan(paperWidth([mono(2, 4)]));
    expect(longestWord("error at capacity v,\npooled")).toBe(8);
    expect(longestWord("")).toBe(0);
  });

  it("adds columns up", () => {
    expect(paperWidth([mono(12), mono(9)])).toBeCloseTo(paperWidth([mono(12)]) + paperWidth([mono(9)]));
    expect(paperWidth([])).toBe(0);
  });
});
