import { describe, expect, it } from "vitest";
import { derive } from "@/lib/domain/compensation/derive";
import { correctedOutput } from "@/lib/domain/compensation/predict";
import { standardDeviationOf } from "@/lib/domain/compensation/sample-statistics";
import type { DerivationInput, Method } from "@/lib/domain/compensation/types";
import { uncertaintyBudget } from "@/lib/domain/compensation/uncertainty/budget";
import type { BudgetSource } from "@/lib/domain/compensation/uncertainty/budget-types";
import type { RunCertificate } from "@/lib/domain/compensation/uncertainty/certificates";
import { combine, coverageFactorOf } from "@/lib/domain/compensation/uncertainty/combine";
import { family, type IdealCell, idealCell, madeUpRun, type RowErrors, seededNormal, signalOf } from "./made-up-run";

const certificate = (kind: string, uncertainty: number, more: Partial<RunCertificate> = {}): RunCertificate => ({
  runId: "run-sample",
  code: kind.toUpperCase(),
  kind,
  uncertainty,
  coverageFactor: 2,
  positions: [],
  ...more,
});

const budgetOf = (input: DerivationInput, certificates: RunCertificate[] = []) =>
  uncertaintyBudget(input, derive(input), certificates);

const lineOf = (budget: ReturnType<typeof budgetOf>, source: BudgetSource) => {
  const line = budget.lines.find((one) => one.source === source);
  if (!line) throw new Error(source);
  return line;
};

describe("combining contributions", () => {
  it("agrees with the example of JCGM 100:2008, G.4.1 (from memory): 1.03 %, 19 degrees, t95 2.09", () => {
    const sum = combine([
      { standard: 0.25, df: 9 },
      { standard: 0.57, df: 4 },
      { standard: 0.82, df: 14 },
    ]);
    expect(sum?.standard).toBeCloseTo(1.03, 2);
    expect(sum?.degreesOfFreedom).toBeCloseTo(19, 1);
  });

  it("takes t at 95.45 % from the table of JCGM 100:2008, G.2 (from memory): 2.65 at 5, 2.32 at 9, 2 at infinity", () => {
    expect(coverageFactorOf(5)).toBeCloseTo(2.65, 2);
    expect(coverageFactorOf(9)).toBeCloseTo(2.32, 2);
    expect(coverageFactorOf(9.99)).toBe(coverageFactorOf(9));
    expect(coverageFactorOf(null)).toBe(2);
    expect(coverageFactorOf(999_999)).toBeCloseTo(2, 4);
  });

  it("says nothing without a contribution, and does not fall below one degree of freedom", () => {
    expect(combine([])).toBeUndefined();
    expect(combine([{ standard: 2, df: 1 }])).toMatchObject({ standard: 2, degreesOfFreedom: 1 });
  });
});

/**
 * Worked by hand: 10 and 40 °C, d = −10 and +20 K, weights of the slope ∓1/30, two unloaded rows ±10⁻⁵ mV/V about their
 * mean, one loaded row of 20 kg at each. s² = (2·10⁻¹⁰ + 2·10⁻¹⁰)/2, s = √2·10⁻⁵; a mean of two has 10⁻⁵ mV/V.
 */
describe("a budget worked by hand", () => {
  let turn = 1;
  const alternating = (row: { loadKg: number }) => {
    if (row.loadKg > 0) return 0;
    turn = -turn;
    return turn * 1e-5;
  };
  const run = madeUpRun({ purpose: "sample", temperaturesC: [10, 40], loads: [0, 20, 0] }, [idealCell("A")], {
    signalMvV: alternating,
  });
  const input: DerivationInput = { family, method: "individual", order: 1, runs: [run], exclude: [] };
  const certificates = [certificate("sensor", 0.04), certificate("load", 0.002), certificate("chamber", 0.3)];
  const budget = budgetOf(input, certificates);
  const { gainTc = 0 } = derive(input).devices[0]?.coefficients ?? {};

  it("holds the unloaded repeatability: s, its freedom, and √2/30 of a mean in zeroTc", () => {
    const line = lineOf(budget, "repeatability.unloaded");
    expect(line.value).toBeCloseTo(Math.SQRT2 * 1e-5, 12);
    expect(line.df).toBe(2);
    expect(line.zeroTc).toBeCloseTo((Math.SQRT2 / 30) * 1e-5, 15);
  });

  it("holds the sensor: 0.02 K, once as an offset that cancels, once as the most it can tilt", () => {
    expect(lineOf(budget, "sensor.common")).toMatchObject({ value: 0.04, divisor: 2, standard: 0.02, zeroTc: 0 });
    expect(lineOf(budget, "sensor.common").gainTc).toBeCloseTo(gainTc ** 2 * 0.02, 14);
    const independent = lineOf(budget, "sensor.independent");
    expect(independent.zeroTc).toBeCloseTo((2e-5 * 0.02 * Math.SQRT2) / 30, 15);
    expect(independent.gainTc).toBeCloseTo((4e-4 * 0.02 * Math.SQRT2) / 30, 8);
    expect(independent.intervals).toBe(0);
  });

  it("holds the load: 0.001 of 20 kg are 5·10⁻⁵, 0.15 v of 3000, and nothing of gainTc", () => {
    expect(lineOf(budget, "load.certificate")).toMatchObject({ unit: "kg", standard: 0.001, gainTc: 0, zeroTc: 0 });
    expect(lineOf(budget, "load.certificate").intervals).toBeCloseTo(0.15, 12);
  });

  it("leaves what is not known null and named, and never 0", () => {
    expect(budget.missing).toEqual(["repeatability.loaded", "reader.certificate", "zero.return", "device.thermometer"]);
    for (const source of budget.missing) {
      const { value, standard, gainTc: slope, zeroTc, intervals, words } = lineOf(budget, source);
      expect([value, standard, slope, zeroTc, intervals]).toEqual([null, null, null, null, null]);
      expect(words.length).toBeGreaterThan(20);
    }
  });

  it("combines zeroTc as the root of the squares, k by the effective freedom", () => {
    const squares = budget.lines.reduce((sum, line) => sum + (line.zeroTc ?? 0) ** 2, 0);
    expect(budget.combined.zeroTc).toBeCloseTo(Math.sqrt(squares), 15);
    const repeat = lineOf(budget, "repeatability.unloaded").zeroTc as number;
    const freedom = squares ** 2 / (repeat ** 4 / 2);
    expect(budget.degreesOfFreedom.zeroTc).toBeCloseTo(freedom, 6);
    expect(budget.coverageFactor.zeroTc).toBe(coverageFactorOf(Math.floor(freedom)));
    expect(budget.expanded.zeroTc).toBe((budget.combined.zeroTc ?? 0) * (budget.coverageFactor.zeroTc ?? 0));
  });

  it("names the worse end of the proven range and both of them", () => {
    expect(budget.ends.map((end) => end.temperatureC)).toEqual([8, 42]);
    expect(budget.atC).toBe(42);
    expect(budget.ends[1]?.combined).toBe(budget.combined.intervals);
  });
});

describe("what the design takes away", () => {
  const cells = [idealCell("A"), idealCell("B", { gainTc: -4.1e-4 })];
  const input = (loads: number[], temperaturesC: number[], method: Method = "individual"): DerivationInput => {
    const runs = [madeUpRun({ purpose: "sample", temperaturesC, loads }, cells)];
    return { family, method, order: 1, runs, exclude: [] };
  };

  it("knows a zero return and a thermometer residual where there is a point to spare", () => {
    const budget = budgetOf(input([0, 12, 0, 12], [20, 40, 10, 20]));
    expect(budget.missing).toEqual([
      "sensor.common",
      "sensor.independent",
      "chamber.uniformity",
      "load.certificate",
      "reader.certificate",
    ]);
    expect(lineOf(budget, "zero.return")).toMatchObject({ distribution: "rectangular", df: 2, gainTc: 0 });
  });

  it("takes a chamber's places where the readings name them, its mean place where they don't", () => {
    const positions = [
      { position: "A1", deviationK: 0.3, uncertaintyK: 0.8 },
      { position: "B2", deviationK: 0, uncertaintyK: 0 },
    ];
    const placed = (position: string | undefined) => {
      const runs = [
        madeUpRun({ purpose: "sample", temperaturesC: [10, 40], loads: [0, 12] }, [idealCell("A", { position })]),
      ];
      const budget = budgetOf({ ...input([0, 12], [10, 40]), runs }, [certificate("chamber", 9, { positions })]);
      return lineOf(budget, "chamber.uniformity").standard;
    };
    expect(placed("A1")).toBeCloseTo(0.5, 12);
    expect(placed("B2")).toBe(0);
    expect(placed(undefined)).toBeCloseTo(Math.sqrt(0.125), 12);
    expect(
      lineOf(budgetOf(input([0, 12], [10, 40]), [certificate("chamber", 0.4)]), "chamber.uniformity").standard,
    ).toBeCloseTo(0.2);
  });

  it("says nothing of the output where no device was loaded or nothing is proven", () => {
    const runs = [madeUpRun({ purpose: "zero", temperaturesC: [10, 40], loads: [0, 0] }, cells)];
    const budget = budgetOf({ ...input([0], [10]), runs, method: "pooled-gain" });
    expect(budget.combined).toEqual({ gainTc: null, zeroTc: null, intervals: null });
    expect(budget.ends).toEqual([]);
    expect(budget.chamber).toMatchObject({ individual: 0, pooled: null, perKelvin: null });
  });

  it("does not add what the sample's scatter holds a second time", () => {
    const budget = budgetOf(input([0, 12, 0, 12], [10, 25, 40], "pooled-gain"), [certificate("chamber", 0.4)]);
    expect(lineOf(budget, "chamber.uniformity").within).toBe("sample.scatter");
    expect(lineOf(budget, "chamber.uniformity").gainTc).toBeGreaterThan(0);
    const scatter = lineOf(budget, "sample.scatter");
    expect(scatter.gainTc).toBeCloseTo(1e-5 / Math.SQRT2 / Math.SQRT2, 12);
    expect(budget.combined.gainTc).toBeCloseTo(scatter.gainTc ?? 0, 15);
  });

  it("lets a sensor that all runs share cancel in a pooled gain, and counts two different ones", () => {
    const sample = madeUpRun({ purpose: "sample", temperaturesC: [10, 40], loads: [0, 12] }, cells);
    const zero = madeUpRun({ purpose: "zero", temperaturesC: [10, 40], loads: [0] }, [idealCell("C")]);
    const span = madeUpRun({ purpose: "span", temperaturesC: [20], loads: [0, 12] }, [idealCell("C")]);
    const runs = [sample, zero, span];
    const named = (other: string) =>
      runs.map(({ id }) => certificate("sensor", 0.1, { runId: id, code: id === "run-zero" ? other : "S-1" }));
    const pooled: DerivationInput = { family, method: "pooled-gain", order: 1, runs, exclude: [] };
    expect(lineOf(budgetOf(pooled, named("S-1")), "sensor.independent").intervals).toBe(0);
    expect(lineOf(budgetOf(pooled, named("S-2")), "sensor.independent").intervals).toBeGreaterThan(0.1);
  });
});

const TRIALS = 400;
/** A standard deviation from 400 trials has itself a relative one of 1/√(2·400) = 3.5 %; three and a half of these. */
const AGREES = 0.125;

/** With a pooled gain a trial takes ten times as long: fewer, and what 150 leave open. */
const POOLED_TRIALS = 150;
const POOLED_AGREES = 0.2;

function expectClose(observed: number | null, predicted: number | null, what: string, agrees = AGREES): void {
  expect(predicted, what).toBeGreaterThan(0);
  expect(Math.abs((observed ?? 0) / (predicted as number) - 1), what).toBeLessThan(agrees);
}

/** Monte Carlo with a fixed seed: errors are drawn, the derivation is made anew, and its scatter is the prediction's. */
describe("propagation against derivations of readings with drawn errors", () => {
  const sample = [1, 2, 3, 4, 5].map((i) => idealCell(`S${i}`, { gainTc: -4e-4 }));
  const device = idealCell("Z");
  const perPoint = (draw: () => number) => {
    const known = new Map<string, number>();
    return (row: { serial: string; chamberC: number }) => {
      const key = `${row.serial} ${row.chamberC}`;
      if (!known.has(key)) known.set(key, draw());
      return known.get(key) as number;
    };
  };

  const designs = {
    individual: { order: 1, temperaturesC: [10, 25, 40], loads: [0, 12, 0, 12] },
    "order 2": { order: 2, temperaturesC: [10, 20, 30, 40], loads: [0, 12, 0, 12] },
  } as const;

  function trial(method: Method, order: 1 | 2, temperaturesC: readonly number[], cell: IdealCell, errors: RowErrors) {
    const design = { purpose: "sample", temperaturesC, loads: [0, 12, 0, 12] } as const;
    const zero = { purpose: "zero", temperaturesC: [10, 40], loads: [0, 0] } as const;
    const span = { purpose: "span", temperaturesC: [21], loads: [0, 20] } as const;
    const runs =
      method === "individual"
        ? [madeUpRun(design, [cell], errors)]
        : [madeUpRun(design, sample, errors), madeUpRun(zero, [cell], errors), madeUpRun(span, [cell], errors)];
    const input: DerivationInput = { family, method, order, runs, exclude: [] };
    return { input, result: derive(input) };
  }

  function observe(
    method: Method,
    order: 1 | 2,
    temperaturesC: readonly number[],
    cell: IdealCell,
    draw: () => RowErrors,
    atC: number,
    inUse = () => 0,
  ) {
    const gainTc: number[] = [];
    const zeroTc: number[] = [];
    const intervals: number[] = [];
    const trials = method === "individual" ? TRIALS : POOLED_TRIALS;
    for (let i = 0; i < trials; i++) {
      const { result } = trial(method, order, temperaturesC, cell, draw());
      const c = result.devices.find((one) => one.serial === cell.serial)?.coefficients;
      if (!c) throw new Error("no coefficients");
      gainTc.push(c.gainTc);
      zeroTc.push(c.zeroTc);
      const deviceTemp = (atC + inUse() - cell.tempOffset) / cell.tempSlope;
      const output = correctedOutput(c, signalOf(cell, atC, family.capacityKg), deviceTemp, family.referenceC);
      intervals.push((output / family.nominalMvV) * family.intervals);
    }
    return {
      gainTc: standardDeviationOf(gainTc),
      zeroTc: standardDeviationOf(zeroTc),
      intervals: standardDeviationOf(intervals),
    };
  }

  it.each(["individual", "order 2"] as const)("holds for signal noise (%s)", (name) => {
    const { order, temperaturesC } = designs[name];
    const cell = name === "order 2" ? idealCell("Z", { zeroTc2: 3e-7, gainTc2: -6e-7 }) : device;
    const normal = seededNormal(20260301);
    const draw = () => ({ signalMvV: () => 1e-5 * normal() });
    // Many cells with the same noise, so that the pooled s is close to the truth.
    const { input } = trial("individual", order, temperaturesC, cell, {});
    const noisy = Array.from({ length: 300 }, (_, i) => ({ ...cell, serial: `Z${i}` }));
    const runs = [madeUpRun({ purpose: "sample", temperaturesC, loads: [0, 12, 0, 12] }, noisy, draw())];
    const budget = budgetOf({ ...input, runs });
    const both = (quantity: "gainTc" | "zeroTc" | "intervals") =>
      Math.hypot(
        lineOf(budget, "repeatability.unloaded")[quantity] ?? 0,
        lineOf(budget, "repeatability.loaded")[quantity] ?? 0,
      );
    const observed = observe("individual", order, temperaturesC, cell, draw, budget.atC ?? 0);
    for (const quantity of ["gainTc", "zeroTc", "intervals"] as const)
      expectClose(observed[quantity], both(quantity), quantity);
  });

  it("holds for chamber errors in an individual trim: numbers move, the output does not", () => {
    const normal = seededNormal(7);
    const { temperaturesC } = designs.individual;
    const draw = () => ({ chamberC: perPoint(() => 0.2 * normal()) });
    const { input } = trial("individual", 1, temperaturesC, device, {});
    const budget = budgetOf(input, [certificate("chamber", 0.4)]);
    const observed = observe("individual", 1, temperaturesC, device, draw, budget.atC ?? 0);
    const line = lineOf(budget, "chamber.uniformity");
    expectClose(observed.gainTc, line.gainTc, "gainTc");
    expectClose(observed.zeroTc, line.zeroTc, "zeroTc");
    expect(line.intervals).toBe(0);
    expect(observed.intervals).toBeLessThan(1e-9);
    expect(budget.chamber.individual).toBe(0);
  });

  it("holds for a device's chamber errors under a pooled gain: the output moves by the number said", () => {
    const normal = seededNormal(11);
    const drawn = () => {
      const own = perPoint(() => 0.2 * normal());
      return { chamberC: (row: { serial: string; chamberC: number }) => (row.serial === device.serial ? own(row) : 0) };
    };
    const { input } = trial("pooled-gain", 1, [10, 40], device, {});
    const certificates = input.runs.map(({ id }) => certificate("chamber", 0.4, { runId: id }));
    const budget = budgetOf({ ...input, runs: input.runs }, certificates);
    const alone = derive(input);
    const only = { ...alone, devices: alone.devices.filter((one) => one.serial === device.serial) };
    const ofDevice = uncertaintyBudget(input, only, certificates);
    const observed = observe("pooled-gain", 1, [10, 40], device, drawn, ofDevice.atC ?? 0);
    expectClose(observed.intervals, lineOf(ofDevice, "chamber.uniformity").intervals, "intervals", POOLED_AGREES);
    expect(ofDevice.chamber.pooled).toBe(lineOf(ofDevice, "chamber.uniformity").intervals);
    expect(budget.chamber.pooled).toBeGreaterThan(0);
  });

  it("holds for a gainTc that is not the device's own", () => {
    const normal = seededNormal(13);
    const { input, result } = trial("pooled-gain", 1, [10, 40], device, {});
    const only = { ...result, devices: result.devices.filter((one) => one.serial === device.serial) };
    if (!only.pooled) throw new Error("not pooled");
    const scattering = { ...only, pooled: { ...only.pooled, sd: 3e-6, n: 1e9 } };
    const line = lineOf(uncertaintyBudget(input, scattering, []), "sample.scatter");
    const outputs = Array.from({ length: POOLED_TRIALS }, () => {
      const cell = { ...device, gainTc: device.gainTc + 3e-6 * normal() };
      const { result: drawn } = trial("pooled-gain", 1, [10, 40], cell, {});
      const c = drawn.devices.find((one) => one.serial === cell.serial)?.coefficients;
      if (!c) throw new Error("no coefficients");
      const u = (42 - cell.tempOffset) / cell.tempSlope;
      return (correctedOutput(c, signalOf(cell, 42, 20), u, 20) / 2) * 3000;
    });
    expectClose(standardDeviationOf(outputs), line.intervals, "intervals", POOLED_AGREES);
  });

  it.each(["individual", "pooled-gain"] as const)(
    "holds for the device's own thermometer, in use too (%s)",
    (method) => {
      const normal = seededNormal(17);
      const noise = perRowOf(normal);
      const temperaturesC = method === "individual" ? designs.individual.temperaturesC : [10, 40];
      const cell = idealCell("Z", { zeroTc: 2e-4 });
      const { input, result } = trial(method, 1, temperaturesC, cell, {});
      const devices = result.devices
        .filter((one) => one.serial === cell.serial)
        .map((one) => ({
          ...one,
          uncertainty: { ...one.uncertainty, residualSdTemperature: 0.1, degreesOfFreedomTemperature: 1 },
        }));
      const line = lineOf(uncertaintyBudget(input, { ...result, devices }, []), "device.thermometer");
      const draw = () => ({ deviceK: noise() });
      const observed = observe(method, 1, temperaturesC, cell, draw, 42, () => 0.1 * normal());
      expectClose(observed.intervals, line.intervals, "intervals", method === "individual" ? AGREES : POOLED_AGREES);
      // The line that the device's thermometer gets takes the errors up: what is left is of second order.
      expect(observed.zeroTc).toBeLessThan(1e-9);
      expect(line.zeroTc).toBeLessThan(1e-12);
    },
  );

  /** One error of 0.1 K for all rows of a point of the device whose budget it is. */
  function perRowOf(normal: () => number) {
    return () => {
      const own = perPoint(() => 0.1 * normal());
      return (row: { serial: string; chamberC: number }) => (row.serial === "Z" ? own(row) : 0);
    };
  }
});
