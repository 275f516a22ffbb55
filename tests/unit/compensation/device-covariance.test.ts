import { describe, expect, it } from "vitest";
import { derive } from "@/lib/domain/compensation/derive";
import { deviceCovariance } from "@/lib/domain/compensation/device-covariance";
import { family, idealCell, madeUpRun, seededNormal } from "./made-up-run";

function covarianceOf(order: 1 | 2, temperaturesC: readonly number[]) {
  const normal = seededNormal(23);
  const cell = idealCell("A", order === 2 ? { zeroTc2: 2e-7, gainTc2: -5e-7 } : {});
  const errors = { signalMvV: () => 1e-5 * normal() };
  const runs = [madeUpRun({ purpose: "sample", temperaturesC, loads: [0, 12, 0, 12] }, [cell], errors)];
  const [device] = derive({ family, method: "individual", order, runs, exclude: [] }).devices;
  if (!device?.coefficients) throw new Error("no coefficients");
  return { device, covariance: deviceCovariance(device.points, device.coefficients, order, family) };
}

describe("covariance of a device's coefficients", () => {
  it.each([1, 2] as const)("has the squares of the standard errors on its diagonal (order %s)", (order) => {
    const { device, covariance } = covarianceOf(order, [10, 17, 25, 33, 40]);
    const { zero, zeroTc, gain, gainTc } = device.uncertainty;
    const root = (value: number | undefined) => Math.sqrt(value as number);
    expect(root(covariance.zero?.[0]?.[0])).toBeCloseTo(zero as number, 15);
    expect(root(covariance.zero?.[1]?.[1])).toBeCloseTo(zeroTc as number, 15);
    expect(root(covariance.gain?.[0]?.[0])).toBeCloseTo(gain as number, 12);
    expect(root(covariance.gain?.[1]?.[1])).toBeCloseTo(gainTc as number, 14);
    expect(covariance.gain).toHaveLength(order + 1);
  });

  it("is symmetric, and of less than full correlation", () => {
    const { zero, gain } = covarianceOf(2, [10, 17, 25, 33, 40]).covariance;
    for (const matrix of [zero, gain]) {
      for (const [i, j] of [
        [0, 1],
        [0, 2],
        [1, 2],
      ] as const) {
        const [a, b] = [matrix?.[i]?.[j] as number, matrix?.[j]?.[i] as number];
        expect(a).toBeCloseTo(b, 18);
        expect(Math.abs(a)).toBeLessThan(Math.sqrt((matrix?.[i]?.[i] as number) * (matrix?.[j]?.[j] as number)));
      }
    }
  });

  it("is null where the fit passes through all its points", () => {
    expect(covarianceOf(1, [10, 40]).covariance).toEqual({ zero: null, gain: null });
  });
});
