import { describe, expect, it } from "vitest";
import { derive } from "@/lib/domain/compensation/derive";
import { findGainTrim } from "@/lib/domain/compensation/individual";
import { standardDeviationOf } from "@/lib/domain/compensation/sample-statistics";
import { normalSource } from "@/tests/support/normal-source";
import { readFamily, readRun } from "./golden-example";

const d = [-30, -30, -15, 0, 0, 10, 20, 20];
const truth = { gain: 0.97, gainTc: -4e-4, gainTc2: 3e-7 };

describe("errors of an individual trim", () => {
  it.each([1, 2] as const)("are those that repeated readings show, order %i", (order) => {
    const normal = normalSource("243f6a8885a308d313198a2e03707344");
    const { gain, gainTc, gainTc2 } = { ...truth, gainTc2: order === 2 ? truth.gainTc2 : 0 };
    const trims = Array.from({ length: 2000 }, () => {
      const spans = d.map((k) => 2 / (gain * (1 + (gainTc + gainTc2 * k) * k) + 2e-5 * normal()));
      return findGainTrim(order, d, spans, 2);
    });
    const scatter = (of: (trim: NonNullable<(typeof trims)[number]>) => number) =>
      standardDeviationOf(trims.flatMap((trim) => (trim ? [of(trim)] : []))) as number;
    // The errors claimed are themselves estimates: their mean square is what has to agree.
    const claimed = (of: (trim: NonNullable<(typeof trims)[number]>) => number | null) =>
      Math.sqrt(trims.reduce((sum, trim) => sum + (trim ? (of(trim) ?? 0) ** 2 : 0), 0) / trims.length);
    // A deviation of 2,000 values is known to 1.6 %; three of these are let through.
    const agree = (a: number, b: number) => expect(Math.abs(a / b - 1)).toBeLessThan(0.05);
    agree(
      claimed((trim) => trim.gainStandardError),
      scatter((trim) => trim.coefficients.gain),
    );
    agree(
      claimed((trim) => trim.gainTcStandardError),
      scatter((trim) => trim.coefficients.gainTc),
    );
    if (order === 1) expect(trims.every((trim) => trim?.gainTc2StandardError === null)).toBe(true);
    else
      agree(
        claimed((trim) => trim.gainTc2StandardError),
        scatter((trim) => trim.coefficients.gainTc2 as number),
      );
  });

  it("stand with the device, those of order 2 too, and are null without a point to spare", () => {
    const family = readFamily("family.json");
    const runs = [readRun("readings-three-points.csv", "sample")];
    const [exact, spare] = ([2, 1] as const).map(
      (order) => derive({ family, method: "individual", order, runs, exclude: [] }).devices[0]?.uncertainty,
    );
    expect(exact).toMatchObject({ zeroTc: null, zeroTc2: null, gainTc: null, gainTc2: null });
    expect(spare?.gainTc).toBeGreaterThan(0);
    expect(spare).not.toHaveProperty("gainTc2");
  });
});
