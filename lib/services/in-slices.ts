import type { Steps } from "@/lib/domain/steps";

/** Longest time for which work keeps the event loop to itself, as far as its steps allow. */
const SLICE_MS = 8;

/** Lets the event loop serve whatever came in meanwhile. */
export const giveWay = (): Promise<void> => new Promise((resolve) => setImmediate(resolve));

/** Runs long work in slices, between which the event loop serves others: requests for health, pages of other people. */
export async function inSlices<T>(steps: Steps<T>): Promise<T> {
  for (;;) {
    const until = performance.now() + SLICE_MS;
    do {
      const { done, value } = steps.next();
      if (done) return value;
    } while (performance.now() < until);
    await giveWay();
  }
}
