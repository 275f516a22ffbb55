/**
 * Work that pauses after every step and can be taken up again: whoever runs it may do something else in the pauses, as a process
 * has to that serves others meanwhile. What the work does is the same with pauses and without.
 */
export type Steps<T> = Generator<void, T, void>;

/** How much of a long list is done in a step: a fraction of a millisecond, where an item takes about a microsecond. */
const ITEMS_A_STEP = 250;

/** Runs work to its end without a pause. */
export function finish<T>(steps: Steps<T>): T {
  for (;;) {
    const { done, value } = steps.next();
    if (done) return value;
  }
}

/** Takes items one after the other. */
export function* forEachInSteps<T>(items: Iterable<T>, take: (item: T) => void): Steps<void> {
  let count = 0;
  for (const item of items) {
    take(item);
    if (++count % ITEMS_A_STEP === 0) yield;
  }
}

/** What is made of each item, in their order. */
export function* mapInSteps<T, R>(items: Iterable<T>, make: (item: T) => R): Steps<R[]> {
  const made: R[] = [];
  yield* forEachInSteps(items, (item) => made.push(make(item)));
  return made;
}
