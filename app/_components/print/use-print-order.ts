"use client";

import { useEffect, useState, useSyncExternalStore } from "react";
import { PrintOrder } from "@/app/_components/print/print-order";

const page = new PrintOrder((done) => {
  window.addEventListener("afterprint", done, { once: true });
  // Later, because the print lays the page out anew and a rendering may be under way.
  setTimeout(() => window.print());
});
const watch = (onChange: () => void) => page.watch(onChange);

/** Prints the page as soon as its tables have loaded what paper takes. */
export function orderPrint(): void {
  page.order();
}

/** For a table: whether a print waits for its rows. */
export function usePrintWaits(): boolean {
  return useSyncExternalStore(
    watch,
    () => page.pending,
    () => false,
  );
}

/** For a table: tells a print that waits when its rows are there, or can't be had. */
export function useTellPrint(ready: boolean): void {
  const waits = usePrintWaits();
  const [table] = useState(() => ({}));
  useEffect(() => page.join(table), [table]);
  useEffect(() => {
    if (waits && ready) page.report(table);
  }, [table, waits, ready]);
}
