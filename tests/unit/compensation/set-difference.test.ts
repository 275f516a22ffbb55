import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { derivationEffect } from "@/lib/domain/compensation/derivation-effect";
import { correctedOutput } from "@/lib/domain/compensation/predict";
import { capacityEffect, comparedRange } from "@/lib/domain/compensation/set-difference";
import type { Coefficients } from "@/lib/domain/compensation/types";

const family = { referenceC: 20, nominalMvV: 2, intervals: 3000 };
const range = [-10, 40] as const;
const set: Coefficients = {
  tempOffset: -230,
  tempSlope: 0.125,
  zero: -0.0139,
  zeroTc: 7e-6,
  gain: 0.996,
  gainTc: -418e-6,
};

describe("what another set does at capacity", () => {
  it("is nothing between equal sets", () => {
    const effect = capacityEffect(set, { ...set }, family, range);
    expect(Math.abs(effect?.intervals ?? 1)).toBeLessThan(1e-9);
  });

  it("is the relative step of gain times the intervals, wherever one looks", () => {
    const effect = capacityEffect(set, { ...set, gain: set.gain * (1 + 1e-4) }, family, range);
    expect(effect?.intervals).toBeCloseTo(0.3, 9);
  });

  it("is largest at the end farther from the reference for a step of gainTc, with its sign", () => {
    const effect = capacityEffect(set, { ...set, gainTc: set.gainTc + 1e-6 }, family, range);
    // From first principles: (1 + (a + h)·d)/(1 + a·d) − 1 = h·d/(1 + a·d), at d = −30 K.
    expect(effect?.atC).toBe(-10);
    expect(effect?.intervals).toBeCloseTo((1e-6 * -30 * 3000) / (1 - 418e-6 * -30), 12);
  });

  it("counts a step of zero by what gain makes of it", () => {
    const effect = capacityEffect(set, { ...set, zero: set.zero + 1e-4 }, family, [20, 20]);
    expect(effect?.intervals).toBeCloseTo(((-1e-4 * set.gain) / 2) * 3000, 9);
  });

  it("agrees with what the device itself would show, for any two sets", () => {
    const one = fc.record({
      tempOffset: fc.double({ min: -300, max: -200, noNaN: true }),
      tempSlope: fc.double({ min: 0.1, max: 0.2, noNaN: true }),
      zero: fc.double({ min: -0.05, max: 0.05, noNaN: true }),
      zeroTc: fc.double({ min: -1e-4, max: 1e-4, noNaN: true }),
      gain: fc.double({ min: 0.9, max: 1.1, noNaN: true }),
      gainTc: fc.double({ min: -1e-3, max: 1e-3, noNaN: true }),
    });
    fc.assert(
      fc.property(one, one, (from, to) => {
        const effect = capacityEffect(from, to, family, range);
        const u = ((effect?.atC ?? 0) - from.tempOffset) / from.tempSlope;
        const d = (effect?.atC ?? 0) - 20;
        const signal = 2 / (from.gain * (1 + from.gainTc * d)) + from.zero + from.zeroTc * d;
        expect(correctedOutput(from, signal, u, 20)).toBeCloseTo(2, 9);
        const shown = correctedOutput(to, signal, u, 20);
        expect((shown / 2 - 1) * 3000).toBeCloseTo(effect?.intervals ?? Number.NaN, 6);
      }),
    );
  });

  it("says nothing where a set can't be applied", () => {
    expect(capacityEffect({ ...set, tempSlope: 0 }, set, family, range)).toBeUndefined();
    expect(capacityEffect({ ...set, gain: 0 }, set, family, range)).toBeUndefined();
  });
});

describe("the temperatures compared", () => {
  const bounds = { temperatureMinC: -10, temperatureMaxC: 40 };
  it.each([
    ["what both prove", [8, 42], [-2, 35], [8, 35], true],
    ["what one proves, where the other proves nothing", [8, 42], null, [8, 42], false],
    ["the family's range, where nothing is proven", null, null, [-10, 40], false],
    ["the family's range, where nothing is common", [8, 12], [30, 42], [-10, 40], false],
  ] as const)("are %s", (_, from, to, expected, proven) => {
    expect(comparedRange(from, to, bounds)).toEqual({ range: expected, proven });
  });
});

describe("the effect of other options on findings", () => {
  const finding = (code: string, serial: string | null, id: string) => ({
    id,
    code,
    serial,
    point: null,
    severity: "soft" as const,
    message: code,
  });
  const result = (findings: ReturnType<typeof finding>[], soft = findings.length) => ({
    counts: { withValues: 1, findings: { hard: 0, soft, note: 0 } },
    findings,
    verification: [],
  });

  it("names what comes and what goes, whatever the ids", () => {
    const before = result([finding("a.b", "S1", "1"), finding("c.d", null, "2")]);
    const after = result([finding("c.d", null, "9"), finding("a.b", "S2", "8")]);
    const effect = derivationEffect(before, after);
    expect(effect.gained.map((one) => one.serial)).toEqual(["S2"]);
    expect(effect.lost.map((one) => one.serial)).toEqual(["S1"]);
    expect(effect.complete).toBe(true);
  });

  it("admits that a cut list is not all", () => {
    expect(derivationEffect(result([finding("a.b", "S1", "1")], 2000), result([])).complete).toBe(false);
  });
});
