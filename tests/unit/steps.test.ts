import { describe, expect, it } from "vitest";
import { finish, forEachInSteps, mapInSteps, type Steps } from "@/lib/domain/steps";
import { giveWay, inSlices } from "@/lib/services/in-slices";

/** Longer than a slice. */
const LONG_MS = 12;

function* busy(times: number): Steps<number> {
  for (let time = 0; time < times; time++) {
    const until = performance.now() + LONG_MS;
    while (performance.now() < until);
    yield;
  }
  return times;
}

describe("work in steps", () => {
  it("does the same in steps as at once, every item once and in order", async () => {
    const items = Array.from({ length: 1_001 }, (_, i) => i);
    const doubled = items.map((item) => item * 2);
    expect(finish(mapInSteps(items, (item) => item * 2))).toEqual(doubled);
    expect(await inSlices(mapInSteps(new Set(items), (item) => item * 2))).toEqual(doubled);
  });

  it("pauses in a long list, and not at the end of a short one", () => {
    const pausesOf = (count: number) => [...forEachInSteps(Array(count), () => undefined)].length;
    expect(pausesOf(0)).toBe(0);
    expect(pausesOf(3)).toBe(0);
    expect(pausesOf(10_000)).toBeGreaterThan(10);
  });

  it("lets others in between two slices, also other work in slices", async () => {
    const order: string[] = [];
    let served = 0;
    let going = true;
    const serving = (async () => {
      while (going) {
        await giveWay();
        served++;
      }
    })();
    const work = (name: string) => inSlices(busy(4)).then((times) => order.push(`${name} ${times}`));
    await Promise.all([work("first"), work("second")]);
    going = false;
    await serving;
    expect(order).toEqual(["first 4", "second 4"]);
    expect(served).toBeGreaterThanOrEqual(4);
  });

  it("fails with what the work throws, at once or after a pause", async () => {
    const failing = function* (): Steps<void> {
      yield* busy(1);
      throw new Error("Nothing fits.");
    };
    await expect(inSlices(failing())).rejects.toThrow("Nothing fits.");
    expect(() => finish(failing())).toThrow("Nothing fits.");
  });
});
