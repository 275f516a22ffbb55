import { describe, expect, it } from "vitest";
import { derive } from "@/lib/domain/compensation/derive";
import { surveyEnvelope } from "@/lib/domain/compensation/survey-envelope";
import type { DerivationResult, FamilyRules, Reading } from "@/lib/domain/compensation/types";
import { readFamily, readLot, readRun } from "./golden-example";

/** Largest of the numbers that are not null. */
function largest(values: (number | null)[]): number {
  return Math.max(...values.map((value) => value ?? 0));
}

function survey(result: DerivationResult, family: FamilyRules) {
  return surveyEnvelope(result.devices, family, result.provenRange);
}

describe("survey of a golden lot", () => {
  const family = readFamily("family.json");
  const result = derive({ family, method: "pooled-gain", order: 1, runs: readLot(""), exclude: [] });
  const { before, after, notProvenC } = survey(result, family);

  it("names after compensation the very device and ratio that the derivation judged worst", () => {
    const ratio = largest(result.devices.map((device) => device.spanRatio));
    expect(after.span?.ratio).toBe(ratio);
    const worst = result.devices.find((device) => device.spanRatio === ratio);
    expect(after.span).toMatchObject({ serial: worst?.serial, errorPpm: worst?.spanErrorPpm, proven: true });
    expect(worst?.loadedAtC).toContain(after.span?.chamberC);
    expect(after.spanDevices).toBe(result.devices.filter((device) => device.spanRatio !== null).length);
    expect(Math.max(...(after.span?.stepEnds ?? []).map((end) => end.ratio))).toBeCloseTo(ratio, 12);
  });

  it("claims nothing on zero where two temperatures leave no point to spare, but shows what was before", () => {
    expect(after.zero).toBeNull();
    expect(after.zeroDevices).toBe(0);
    expect(before.zeroDevices).toBe(28);
    expect(before.zero?.ratio).toBeGreaterThan(0);
  });

  it("finds the lot worse before than after", () => {
    expect(before.span?.ratio).toBeGreaterThan(after.span?.ratio as number);
  });

  it("marks the rest of the family's range as not proven", () => {
    expect(result.provenRange).toEqual([8.06, 41.9]);
    expect(notProvenC).toEqual([]);
    const wide = { ...family, temperatureMinC: -10, temperatureMaxC: 50 };
    expect(survey(result, wide).notProvenC).toEqual([
      [-10, 8.06],
      [41.9, 50],
    ]);
    expect(surveyEnvelope(result.devices, family, null)).toMatchObject({
      after: { span: { proven: false } },
      notProvenC: [[family.temperatureMinC, family.temperatureMaxC]],
    });
  });
});

describe("survey of three temperatures", () => {
  const family = readFamily("family.json");
  const runs = [readRun("readings-three-points.csv", "sample")];
  const result = derive({ family, method: "individual", order: 1, runs, exclude: [] });
  const { after } = survey(result, family);

  it("names the worst zero shift that the derivation judged", () => {
    expect(after.zero?.ratio).toBe(largest(result.devices.map((device) => device.zeroShiftRatio)));
    expect(after.zero?.toC).toBeGreaterThan((after.zero?.fromC as number) + 5);
    expect(after.zeroDevices).toBe(4);
    expect(after.span?.ratio).toBe(largest(result.devices.map((device) => device.spanRatio)));
  });
});

describe("survey before compensation, worked by hand", () => {
  const family = { ...readFamily("family.json"), capacityKg: 20, nominalMvV: 2, referenceC: 20, intervals: 3000 };
  /** Output 2 mV/V at 20 °C, 100 ppm/K more above; zero moves by 0.0001 mV/V/K below, 0.0002 above. */
  const reading = (row: number, point: number, chamberC: number, loadKg: number): Reading => ({
    row,
    serial: "M-1",
    point,
    chamberC,
    soakMin: 120,
    deviceTemp: chamberC,
    loadKg,
    signalMvV:
      0.01 + (chamberC < 20 ? 0.0001 : 0.0002) * (chamberC - 20) + (loadKg / 20) * 2 * (1 + 100e-6 * (chamberC - 20)),
    takenAt: "2026-09-01T08:00:00Z",
  });
  const temperatures = [10, 20, 40];
  const readings = temperatures.flatMap((chamberC, i) => [
    reading(2 * i + 2, i + 1, chamberC, 0),
    reading(2 * i + 3, i + 1, chamberC, 20),
  ]);
  const result = derive({
    family,
    method: "individual",
    order: 1,
    runs: [{ id: "r", purpose: "sample", readings }],
    exclude: [],
  });

  it("takes gain and zero at the point nearest the reference", () => {
    const { before } = survey(result, family);
    expect(before.span).toMatchObject({ serial: "M-1", chamberC: 40 });
    // 100 ppm/K over the 20 K from the reference.
    expect(before.span?.errorPpm).toBeCloseTo(2000, 6);
    expect(before.span?.stepEnds.at(-1)).toMatchObject({ load: 3000 });
    expect(before.span?.stepEnds.at(-1)?.error).toBeCloseTo(6, 8);
    // 20 K · 0.0002 mV/V/K of 2 mV/V at 3,000 intervals.
    expect(before.zero).toMatchObject({ serial: "M-1", fromC: 20, toC: 40 });
    expect(before.zero?.shiftIntervals).toBeCloseTo(6, 8);
    expect(before.zero?.ratio).toBeCloseTo(((0.0002 * 5) / 2) * (family.vMinRatioY / family.pLc), 8);
  });

  it("leaves out a device without coefficients", () => {
    const excluded = result.devices.map((device) => ({ ...device, coefficients: null }));
    expect(surveyEnvelope(excluded, family, result.provenRange)).toMatchObject({
      before: { span: null, zero: null, spanDevices: 0, zeroDevices: 0 },
      after: { span: null, zero: null },
    });
  });
});
