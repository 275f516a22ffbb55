"use client";

import { type RefObject, useLayoutEffect } from "react";
import { type DataColumn, isMono, unitOf } from "@/app/_components/table/column";
import { type ColumnTexts, longestWord, paperWidth } from "@/app/_components/table/paper-width";

/** At the smallest type of `globals.css`, A4 upright takes so much; in wider tables figures break too. */
const NARROWEST = 90;

/** Sets the table's type for the paper, whichever way it is turned: `globals.css` makes a font size of the width that it tells. */
export function usePaperFit(
  table: RefObject<HTMLTableElement | null>,
  columns: readonly DataColumn[],
  printing: boolean,
): void {
  useLayoutEffect(() => {
    if (!printing || !table.current) return;
    const width = paperWidth(textsOf(table.current, columns));
    table.current.style.setProperty("--paper-width", width.toFixed(1));
    table.current.toggleAttribute("data-tight", width > NARROWEST);
  }, [table, columns, printing]);
}

/** Measured from what is drawn: a column may draw its cells itself. */
function textsOf(table: HTMLTableElement, columns: readonly DataColumn[]): ColumnTexts[] {
  const texts = columns.map((column) => {
    const heading = longestWord(`${column.header} ${unitOf(column) ?? ""}`);
    return { mono: isMono(column), longest: 0, word: 0, heading };
  });
  const printed = table.querySelector<HTMLTableSectionElement>("[data-printed]");
  for (const row of (printed ?? table.tBodies[0])?.rows ?? []) {
    const cells = [...row.cells].slice(-columns.length);
    if (cells.length < columns.length) continue; // a row that stands for others
    cells.forEach((cell, at) => {
      const column = texts[at] as ColumnTexts;
      const text = cell.textContent ?? "";
      const sign = cell.querySelector("svg") ? 3 : 0;
      column.longest = Math.max(column.longest, text.length + sign);
      column.word = Math.max(column.word, longestWord(text) + sign);
    });
  }
  return texts;
}
