/** A wish to print the page, kept until every table on it has loaded what paper takes. */
export class PrintOrder {
  #state: "idle" | "loading" | "printing" = "idle";
  readonly #loaded = new Map<object, boolean>();
  readonly #watchers = new Set<() => void>();
  readonly #print: (done: () => void) => void;

  /** @param print prints the page, and calls `done` when the rows need not be held any longer. */
  constructor(print: (done: () => void) => void) {
    this.#print = print;
  }

  /** Tables hold what paper takes. */
  get pending(): boolean {
    return this.#state !== "idle";
  }

  watch(onChange: () => void): () => void {
    this.#watchers.add(onChange);
    return () => void this.#watchers.delete(onChange);
  }

  /** A table is on the page. @returns takes it off again. */
  join(table: object): () => void {
    this.#loaded.set(table, false);
    return () => {
      this.#loaded.delete(table);
      this.#printIfReady();
    };
  }

  /** While an order is pending: a table has what it prints, or can't have it and says so where its rows stand. */
  report(table: object): void {
    if (this.#state !== "loading" || !this.#loaded.has(table)) return;
    this.#loaded.set(table, true);
    this.#printIfReady();
  }

  order(): void {
    if (this.#state === "loading") return;
    for (const table of this.#loaded.keys()) this.#loaded.set(table, false);
    this.#turn("loading");
    this.#printIfReady();
  }

  #printIfReady(): void {
    if (this.#state !== "loading" || ![...this.#loaded.values()].every(Boolean)) return;
    this.#turn("printing");
    this.#print(() => this.#state === "printing" && this.#turn("idle"));
  }

  #turn(state: "idle" | "loading" | "printing"): void {
    this.#state = state;
    for (const watcher of this.#watchers) watcher();
  }
}
