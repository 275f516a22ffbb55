import { describe, expect, it } from "vitest";
import { DriftRangeGatherer } from "@/lib/domain/compensation/drift-range";

const curve = (shift: number, temperatures = [10, 40]) => ({
  before: temperatures.map((chamberC) => ({ chamberC: chamberC + shift / 10, value: chamberC * shift })),
  after: temperatures.map((chamberC) => ({ chamberC: chamberC + shift / 10, value: shift })),
});

describe("the range that many drift curves span", () => {
  it("reaches from the lowest to the highest value of each point, at the mean temperature", () => {
    const gatherer = new DriftRangeGatherer();
    for (const shift of [-1, 0, 2]) gatherer.add(curve(shift));
    expect(gatherer.devices).toBe(3);
    expect(gatherer.finish()).toEqual([
      { chamberC: expect.closeTo(10 + 0.1 / 3, 12), before: [-10, 20], after: [-1, 2] },
      { chamberC: expect.closeTo(40 + 0.1 / 3, 12), before: [-40, 80], after: [-1, 2] },
    ]);
  });

  it("does not mix in devices read at another number of points, but counts them", () => {
    const gatherer = new DriftRangeGatherer();
    gatherer.add(curve(1));
    gatherer.add(curve(9, [10, 25, 40]));
    expect([gatherer.devices, gatherer.others]).toEqual([1, 1]);
    expect(gatherer.finish().map(({ after }) => after)).toEqual([
      [1, 1],
      [1, 1],
    ]);
  });

  it("is empty where nothing was added", () => {
    expect(new DriftRangeGatherer().finish()).toEqual([]);
  });
});
