import { describe, expect, it } from "vitest";
import { type Twin, twinOutput } from "@/builders/codec/twin/twin";
import { judgeProof, PROOF_SHARE, type ProofReading } from "@/builders/codec/twin/twin-proof";
import { firstGolden } from "../../../support/scenario/golden";

const { family } = firstGolden();
// Of the golden example's order of size: 2 mV/V, class C, n 3000, so that one interval is 1/1500 mV/V.
const twin: Twin = {
  coefficients: {
    tempOffset: -273,
    tempSlope: 0.146,
    zero: -0.0139,
    zeroTc: 7e-6,
    zeroTc2: null,
    gain: 0.9961,
    gainTc: -4.18e-4,
    gainTc2: null,
  },
  referenceTemperature: family.referenceC,
};
const perInterval = family.nominalMvV / family.intervals;
const deviceTempAt = (celsius: number) => (celsius + 273) / 0.146;

/** A reading whose output is what the twin says, off by some intervals. */
function reading(celsius: number, loadKg: number, off = 0, of = twin): ProofReading {
  const signalMvV = -0.0139 + (2.01 * loadKg) / family.capacityKg;
  const deviceTemp = deviceTempAt(celsius);
  const outputMvV = twinOutput(of, signalMvV, deviceTemp) + off * perInterval;
  return { row: 2, point: 1, chamberC: celsius, deviceTemp, loadKg, signalMvV, outputMvV };
}

const shownBy = (readings: ProofReading[]) =>
  judgeProof(twin, readings, family)
    .shown.filter((one) => one.shown)
    .map((one) => one.name);

describe("judgeProof", () => {
  it("finds no difference where the device computes as its image says", () => {
    const { agrees, worst, rows } = judgeProof(twin, [reading(10, 0), reading(40, 12)], family);
    expect(agrees).toBe(true);
    expect(rows.map((row) => row.differenceIntervals)).toEqual([0, 0]);
    expect(worst.ratio).toBe(0);
  });

  it.each([
    // p_LC 0.7: 0.35 v up to 500 v, 0.7 v up to 2,000 v, 1.05 v above (OIML R 60-1:2021, table 4); a third of it
    [0, 0.35],
    [(family.capacityKg * 500) / family.intervals, 0.35],
    [(family.capacityKg * 501) / family.intervals, 0.7],
    [family.capacityKg, 1.05],
  ])("allows a third of the limit at %d kg", (loadKg, mpe) => {
    const limit = mpe * PROOF_SHARE;
    expect(judgeProof(twin, [reading(23, loadKg, limit * 0.999)], family).agrees).toBe(true);
    const over = judgeProof(twin, [reading(23, loadKg, -limit * 1.001)], family);
    expect(over.agrees).toBe(false);
    expect(over.worst.limitIntervals).toBeCloseTo(limit, 12);
    expect(over.worst.differenceIntervals).toBeCloseTo(-limit * 1.001, 8);
  });

  it("names the reading that differs most in its own limit, not in intervals", () => {
    const { worst } = judgeProof(twin, [reading(23, family.capacityKg, 0.3), reading(23, 0, 0.2)], family);
    expect(worst.loadKg).toBe(0);
  });

  it("catches a firmware that takes gainTc with the other sign", () => {
    const wrong: Twin = { ...twin, coefficients: { ...twin.coefficients, gainTc: -twin.coefficients.gainTc } };
    expect(judgeProof(twin, [reading(40, 12, 0, wrong)], family).agrees).toBe(false);
  });

  it("tells what the readings could not have shown", () => {
    expect(shownBy([reading(family.referenceC, 0)])).toEqual(["zero"]);
    expect(shownBy([reading(family.referenceC, 12)])).toEqual(["zero", "gain"]);
    expect(shownBy([reading(10, 12)])).toEqual(["zero", "gain", "gainTc"]);
  });

  it("says nothing of coefficients that the order has not", () => {
    const names = judgeProof(twin, [reading(10, 12)], family).shown.map((one) => one.name);
    expect(names).toEqual(["zero", "zeroTc", "gain", "gainTc"]);
  });
});
