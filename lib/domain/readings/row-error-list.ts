import type { RowError } from "@/lib/domain/compensation/run-checks";

/** How many errors an answer names; the total is always whole. */
export const ERRORS_SHOWN_MAX = 200;

/** Gathers errors of rows: names the first ones, counts them all. */
export class RowErrorList {
  private readonly named: RowError[] = [];
  private count = 0;

  add(error: RowError): void {
    this.count++;
    if (this.named.length < ERRORS_SHOWN_MAX) this.named.push(error);
  }

  /** All errors met, named or not. */
  get total(): number {
    return this.count;
  }

  /** The named ones by line of the file. */
  list(): RowError[] {
    return [...this.named].sort((a, b) => a.row - b.row);
  }
}
