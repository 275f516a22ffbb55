"use client";

import type { ReactNode } from "react";
import { usePrinting } from "@/app/_components/print/use-printing";
import type { Row } from "@/app/_components/table/column";
import { printedNote, printedStretches } from "@/app/_components/table/printed-rows";

export interface PrintedNoteProps {
  /** As the grid has them. */
  rows: readonly (Row | undefined)[];
  /** Rows of the whole list as filtered; null where that is not known. */
  total: number | null;
  /** What the rows had to pass, in words. */
  filter?: string;
  /** What the table says of its rows on the screen too. */
  children?: ReactNode;
}

/** Over a printed table: which rows of how many stand on the paper, where they are not all. */
export function PrintedNote({ rows, total, filter, children }: PrintedNoteProps) {
  const printing = usePrinting();
  if (!printing) return null;
  const note = printedNote(printedStretches(rows), total, filter);
  return (
    <div className="mb-2 hidden text-sm break-after-avoid print:block">
      {children ? <p>{children}</p> : null}
      {note ? <p className="font-semibold">{note}</p> : null}
    </div>
  );
}
