import { describe, expect, it } from "vitest";
import { derive } from "@/lib/domain/compensation/derive";
import type { DerivationInput, Finding, RunReadings } from "@/lib/domain/compensation/types";
import { listEquipmentFindings } from "@/lib/services/runs/equipment-findings";
import { family, type IdealCell, idealCell, madeUpRun } from "./made-up-run";

const gainTcs = [-4.0e-4, -4.01e-4, -3.99e-4, -4.02e-4, -3.98e-4, -4.0e-4];
const sample = gainTcs.map((gainTc, i) => idealCell(`S${i}`, { gainTc }));
const others = ["Z0", "Z1"].map((serial) => idealCell(serial));
const proven = ["V0", "V1"].map((serial) => idealCell(serial));
const cold = [10, 40];

const runs = {
  sample: madeUpRun({ purpose: "sample", temperaturesC: cold, loads: [0, 12] }, sample),
  zero: madeUpRun({ purpose: "zero", temperaturesC: cold, loads: [0] }, others),
  span: madeUpRun({ purpose: "span", temperaturesC: [21], loads: [0, 12] }, others),
  verification: madeUpRun({ purpose: "verification", temperaturesC: cold, loads: [0, 12] }, proven),
};

function findingsOf(list: readonly RunReadings[], change: Partial<DerivationInput> = {}): Finding[] {
  const result = derive({ family, method: "pooled-gain", order: 1, runs: list, exclude: [], ...change });
  return [...result.findings, ...result.devices.flatMap((device) => device.findings)];
}

const severe = (findings: Finding[]) =>
  findings.filter((one) => one.severity !== "note").map((one) => `${one.severity} ${one.code} ${one.serial ?? "lot"}`);

describe("a derivation with nothing to decide", () => {
  it("has no hard and no soft finding", () => {
    expect(severe(findingsOf(Object.values(runs)))).toEqual([]);
  });
});

describe("what blocks approval", () => {
  it.each<[string, RunReadings[], Partial<DerivationInput>]>([
    [
      "hard sample.too_small lot",
      [madeUpRun({ purpose: "sample", temperaturesC: cold, loads: [0, 12] }, sample.slice(0, 4)), runs.verification],
      {},
    ],
    ["hard device.span_only Z0", [runs.sample, runs.verification, runs.span], {}],
    [
      "hard temperatures.too_few S0",
      [madeUpRun({ purpose: "sample", temperaturesC: [20, 24], loads: [0, 12] }, sample)],
      { method: "individual" },
    ],
    ["hard gain.not_loaded Z0", [runs.zero], { method: "individual" }],
    ["hard exclusion.unknown_serial lot", Object.values(runs), { exclude: [{ serial: "NOBODY", reason: "x" }] }],
  ])("finds %s", (expected, list, change) => {
    expect(severe(findingsOf(list, change))).toContain(expected);
  });

  it("finds a verification device outside the envelope, a sample that scatters beyond the limit, and a changed board", () => {
    const bad = madeUpRun({ purpose: "verification", temperaturesC: cold, loads: [0, 12] }, [
      idealCell("V0", { gainTc: -3e-4 }),
    ]);
    expect(severe(findingsOf([runs.sample, bad]))).toContain("hard verification.failed lot");
    const wide = sample.map((cell, i) => ({ ...cell, gainTc: -4e-4 + i * 1e-5 }));
    const scattering = madeUpRun({ purpose: "sample", temperaturesC: cold, loads: [0, 12] }, wide);
    expect(severe(findingsOf([scattering, runs.verification]))).toContain("hard pooled.limit_exceeded lot");
    const board = (run: RunReadings, hardwareId: string) => ({
      ...run,
      readings: run.readings.map((row) => ({ ...row, hardwareId })),
    });
    const changed = [runs.sample, runs.verification, board(runs.zero, "B-1"), board(runs.span, "B-2")];
    expect(severe(findingsOf(changed))).toContain("hard device.board_changed Z0");
  });

  it("needs five sample devices and no more", () => {
    const five = madeUpRun({ purpose: "sample", temperaturesC: cold, loads: [0, 12] }, sample.slice(0, 5));
    expect(severe(findingsOf([five, runs.verification]))).toEqual([]);
  });
});

describe("what has to be acknowledged", () => {
  it("is a device never loaded, and a pooled gain without proof", () => {
    const found = severe(findingsOf([runs.sample, runs.zero]));
    expect(found).toEqual(["soft verification.missing lot", "soft gain.not_trimmed Z0", "soft gain.not_trimmed Z1"]);
  });

  it("is a gain further than 0.2 from 1, and not one at it", () => {
    const gain = (value: number) =>
      severe(
        findingsOf(
          [madeUpRun({ purpose: "sample", temperaturesC: cold, loads: [0, 12] }, [idealCell("G", { gain: value })])],
          { method: "individual" },
        ),
      );
    expect(gain(1.2001)).toContain("soft gain.far_from_nominal G");
    expect(gain(1.1999)).toEqual([]);
  });

  /** p_LC·v_min in 5 K is 1.4·10⁻⁴ mV/V: over the 15 K between two points 4.2·10⁻⁴ mV/V. */
  it("is a zero that shifts beyond the limit at minimum load, and not one at it", () => {
    // Of a bend b·d² over points 15 K apart the line leaves 75·b·(1, −2, 1): neighbours differ by 225·b.
    const bent = (ratio: number): IdealCell =>
      idealCell("B", { zeroTc: 0, gain: 1, gainTc: 0, zeroTc2: (ratio * 4.2e-4) / 225 });
    const found = (ratio: number) => {
      const run = madeUpRun({ purpose: "sample", temperaturesC: [10, 25, 40], loads: [0, 12] }, [bent(ratio)]);
      return severe(findingsOf([run], { method: "individual" }));
    };
    expect(found(1.001)).toEqual(["soft device.outside_envelope B"]);
    expect(found(0.999)).toEqual([]);
  });

  it("is equipment past its day on the day of the last reading", () => {
    const piece = (calibratedUntil: string) => ({ code: "S-1", certificate: "K-1", calibratedUntil });
    const on = (until: string) =>
      listEquipmentFindings([piece(until)], "2026-03-02T23:59:00.000Z").map((one) => one.code);
    expect(on("2026-03-01")).toEqual(["equipment.overdue"]);
    expect(on("2026-03-02")).toEqual([]);
    expect(listEquipmentFindings([], "2026-03-02T00:00:00.000Z")).toMatchObject([
      { code: "equipment.none_named", severity: "note" },
    ]);
  });
});
