import { describe, expect, it } from "vitest";
import { derive } from "@/lib/domain/compensation/derive";
import { checkRun } from "@/lib/domain/compensation/run-checks";
import type { DerivationResult, PooledResult } from "@/lib/domain/compensation/types";
import { finish } from "@/lib/domain/steps";
import { readFamily, readJson, readLot, readRun } from "./golden-example";

type Values = Record<string, number | null>;

interface Expected {
  individual: Record<string, Values>;
  pooled: Values;
  pooledDevices: Record<string, Values>;
  verification: Record<string, Values>;
  exclude?: string[];
  neverLoaded?: string[];
}

/** The golden values agree to 1e-9 of their size, near zero to 1e-12. */
function agrees(actual: Record<string, unknown> | null | undefined, expected: Values, what: string): void {
  expect(actual, what).toBeTruthy();
  for (const [name, value] of Object.entries(expected)) {
    const got = actual?.[name];
    if (value === null) expect(got, `${what} ${name}`).toBeNull();
    else
      expect(Math.abs((got as number) - value), `${what} ${name}`).toBeLessThanOrEqual(
        Math.max(1e-12, 1e-9 * Math.abs(value)),
      );
  }
}

function bySerial(result: DerivationResult) {
  return new Map(result.devices.map((device) => [device.serial, device]));
}

function agreesPooled(pooled: PooledResult | null, expected: Expected, factorDigits: number): void {
  const { toleranceFactor9595, ...rest } = expected.pooled;
  agrees({ ...pooled }, rest, "pooled");
  expect(pooled?.toleranceFactor).toBeCloseTo(toleranceFactor9595 as number, factorDigits);
}

const severe = (result: DerivationResult) =>
  [...result.findings, ...result.devices.flatMap((device) => device.findings)].filter(
    (finding) => finding.severity !== "note",
  );

describe("first golden lot", () => {
  const family = readFamily("family.json");
  const expected = readJson<Expected>("expected-coefficients.json");
  const result = derive({ family, method: "pooled-gain", order: 1, runs: readLot(""), exclude: [] });
  const devices = bySerial(result);

  it("holds every pooled coefficient", () => {
    const serials = Object.keys(expected.pooledDevices);
    expect(serials).toHaveLength(28);
    expect([...devices.keys()]).toEqual([...serials].sort());
    for (const serial of serials)
      agrees({ ...devices.get(serial)?.coefficients }, expected.pooledDevices[serial] as Values, serial);
  });

  it("holds the sample's individual trims, inside a pooled derivation and alone", () => {
    const runs = readLot("").slice(0, 1);
    const alone = bySerial(derive({ family, method: "individual", order: 1, runs, exclude: [] }));
    for (const [serial, values] of Object.entries(expected.individual)) {
      agrees({ ...alone.get(serial)?.coefficients }, values, serial);
      const { gain, gainTc } = values as { gain: number; gainTc: number };
      agrees({ ...devices.get(serial)?.individual }, { gain, gainTc }, serial);
    }
  });

  it("holds the lot's mean, deviation, limit and exact factor, and finds it inside", () => {
    agreesPooled(result.pooled, expected, 7);
    expect(result.pooled?.verdict).toBe("inside");
    expect(result.provenRange).toEqual([8.06, 41.9]);
  });

  it("holds the verification, and says what was judged", () => {
    for (const device of result.verification) {
      agrees({ ...device }, expected.verification[device.serial] as Values, device.serial);
      expect(device).toMatchObject({ passed: true, judged: ["spanRatio"] });
    }
    expect(result.verification).toHaveLength(4);
  });

  it("finds nothing to block or to acknowledge, neither in the lot nor in its runs", () => {
    expect(severe(result)).toEqual([]);
    for (const run of readLot("")) {
      const check = finish(checkRun(family, run.purpose, run.readings));
      expect(check.errors).toEqual([]);
      expect(check.findings.filter((finding) => finding.severity !== "note")).toEqual([]);
    }
  });

  it("claims no certainty that two temperatures can't give", () => {
    for (const device of result.devices) {
      expect(device.zeroShiftRatio).toBeNull();
      expect(device.uncertainty).toMatchObject({ zero: null, zeroTc: null, gain: null, residualSdZero: null });
    }
  });
});

describe("second golden lot: an exclusion, devices never loaded, mixed loads", () => {
  const family = readFamily("second/family.json");
  const expected = readJson<Expected>("second/expected-coefficients.json");
  const exclude = (expected.exclude ?? []).map((serial) => ({ serial, reason: "cable chafed in the chamber door" }));
  const result = derive({ family, method: "pooled-gain", order: 1, runs: readLot("second/"), exclude });
  const devices = bySerial(result);

  it("holds every pooled coefficient and the lot's figures", () => {
    for (const [serial, values] of Object.entries(expected.pooledDevices))
      agrees({ ...devices.get(serial)?.coefficients }, values, serial);
    for (const [serial, { gain, gainTc }] of Object.entries(expected.individual))
      agrees({ ...devices.get(serial)?.individual }, { gain, gainTc } as Values, serial);
    for (const device of result.verification)
      agrees({ ...device }, expected.verification[device.serial] as Values, device.serial);
    agreesPooled(result.pooled, expected, 4);
  });

  it("gives an excluded device no set but keeps it visible with its own trim", () => {
    const device = devices.get("MW300-2610-00003");
    expect(device).toMatchObject({ role: "excluded", coefficients: null });
    expect(device?.individual?.gain).toBeGreaterThan(0.9);
    expect(device?.findings.map((finding) => finding.code)).toEqual(["device.excluded"]);
  });

  it("asks to acknowledge exactly the devices never loaded, and says nothing on their span", () => {
    expect(severe(result).map((finding) => [finding.code, finding.severity, finding.serial])).toEqual(
      expected.neverLoaded?.map((serial) => ["gain.not_trimmed", "soft", serial]),
    );
    for (const serial of expected.neverLoaded ?? [])
      expect(devices.get(serial)).toMatchObject({ gainFrom: "sample-mean", spanRatio: null, spanErrorPpm: null });
  });
});

describe("golden lot of three temperatures", () => {
  it("holds the individual trims of order 2", () => {
    const expected = readJson<Expected>("expected-coefficients-three-points.json");
    const runs = [readRun("readings-three-points.csv", "sample")];
    const family = readFamily("family.json");
    const result = derive({ family, method: "individual", order: 2, runs, exclude: [] });
    const devices = bySerial(result);
    expect(devices.size).toBe(4);
    for (const [serial, values] of Object.entries(expected.individual))
      agrees({ ...devices.get(serial)?.coefficients }, values, serial);
    expect(severe(result)).toEqual([]);
  });
});
