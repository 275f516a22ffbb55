import { describe, expect, it } from "vitest";
import { type DerivedBefore, type ImportedSet, listImportFindings } from "@/lib/domain/compensation/import-findings";
import { poolGain } from "@/lib/domain/compensation/pooled";
import type { Coefficients, FamilyRules } from "@/lib/domain/compensation/types";
import { finish } from "@/lib/domain/steps";
import { readFamily, readJson } from "./golden-example";
import { family, seededNormal } from "./made-up-run";

const importFindings = (...given: Parameters<typeof listImportFindings>) => finish(listImportFindings(...given));
const normal = seededNormal(83);
const set = (serial: string, change: Partial<Coefficients> = {}): ImportedSet => ({
  serial,
  coefficients: {
    tempOffset: -230,
    tempSlope: 0.125,
    zero: -0.01,
    zeroTc: 2e-5,
    gain: 1.002,
    gainTc: -4e-4,
    ...change,
  },
});

const lotOf = (change: (i: number) => Partial<Coefficients> = () => ({})): ImportedSet[] =>
  Array.from({ length: 12 }, (_, i) => set(`I${i}`, { zeroTc: (i % 2 === 0 ? 1 : -1) * 2e-5, ...change(i) }));

const derivedOf = (sets: readonly ImportedSet[]): DerivedBefore => ({
  values: new Map(sets.map(({ serial, coefficients }) => [serial, coefficients])),
  pooled: poolGain(
    sets.map(({ coefficients }, i) => ({ ...coefficients, gainTc: -4e-4 + (i % 2) * 1e-7 })),
    1,
    family,
  ),
});

const codesOf = (sets: readonly ImportedSet[], derived: DerivedBefore | null = null, rules: FamilyRules = family) =>
  importFindings(sets, rules, derived).map((one) => one.code);

describe("imported coefficients that are in order", () => {
  it("have the one note that nothing was measured, with and without derived ones beside them", () => {
    expect(codesOf(lotOf())).toEqual(["import.not_measured"]);
    expect(codesOf(lotOf(), derivedOf(lotOf()))).toEqual(["import.not_measured"]);
  });

  it.each(["", "second/"])("are those of the golden lot %s", (prefix) => {
    const { pooledDevices } = readJson<{ pooledDevices: Record<string, Coefficients> }>(
      `${prefix}expected-coefficients.json`,
    );
    const sets = Object.entries(pooledDevices).map(([serial, coefficients]) => ({ serial, coefficients }));
    const golden = readFamily(`${prefix}family.json`);
    const derived = { values: new Map(Object.entries(pooledDevices)), pooled: null };
    expect(codesOf(sets, null, golden)).toEqual(["import.not_measured"]);
    expect(codesOf(sets, derived, golden)).toEqual(["import.not_measured"]);
  });
});

describe("signs", () => {
  it("tells gain's effect in the place of its correction, against what readings gave", () => {
    const turned = lotOf(() => ({ gainTc: 4e-4 }));
    const [, finding] = importFindings(turned, family, derivedOf(lotOf()));
    expect(finding).toMatchObject({
      code: "import.sign_opposite",
      severity: "soft",
      data: { coefficient: "gainTc", opposite: 12, compared: 12 },
    });
    expect(finding?.message).toContain("gainTc is the correction");
  });

  it("tells zero's correction in the place of its drift, device by device only", () => {
    const turned = lotOf((i) => ({ zeroTc: (i % 2 === 0 ? -1 : 1) * 2e-5 }));
    const [, finding] = importFindings(turned, family, derivedOf(lotOf()));
    expect(finding).toMatchObject({ code: "import.sign_opposite", data: { coefficient: "zeroTc", opposite: 12 } });
    expect(finding?.message).toContain("zeroTc is the drift itself");
    const others = turned.map((one) => ({ ...one, serial: `X${one.serial}` }));
    expect(codesOf(others, derivedOf(lotOf()))).toEqual(["import.not_measured"]);
    expect(
      codesOf(
        others.map((one) => set(one.serial, { gainTc: 4e-4 })),
        derivedOf(lotOf()),
      ),
    ).toContain("import.sign_opposite");
  });

  it("needs more than half of those compared, and values that matter", () => {
    const turned = (count: number) => lotOf((i) => ({ gainTc: i < count ? 4e-4 : -4e-4 }));
    expect(codesOf(turned(6), derivedOf(lotOf()))).not.toContain("import.sign_opposite");
    expect(codesOf(turned(7), derivedOf(lotOf()))).toContain("import.sign_opposite");
    const slight = lotOf(() => ({ zeroTc: 1e-6 }));
    expect(
      codesOf(
        lotOf(() => ({ zeroTc: -1e-6 })),
        derivedOf(slight),
      ),
    ).toEqual(["import.not_measured"]);
  });

  it("only notes a positive gainTc where there is nothing to compare with", () => {
    const positive = (count: number) => lotOf((i) => ({ gainTc: i < count ? 4e-4 : -4e-4 }));
    const found = importFindings(positive(12), family, null);
    expect(found[1]).toMatchObject({
      code: "import.sign_unusual",
      severity: "note",
      data: { positive: 12, compared: 12 },
    });
    expect(codesOf(positive(6))).not.toContain("import.sign_unusual");
    expect(codesOf(positive(7))).toContain("import.sign_unusual");
  });
});

describe("units and limits", () => {
  it("tells a gainTc in ppm/K and a zeroTc in percent, and not what a cell can have", () => {
    const found = importFindings(
      lotOf(() => ({ gainTc: -400 })),
      family,
      null,
    );
    expect(found[1]).toMatchObject({
      code: "import.unit_suspect",
      severity: "soft",
      data: { coefficient: "gainTc", value: -400, devices: 12 },
    });
    // 10 % over the 20 K from the reference to the end of the range: 0.005 1/K, 0.01 mV/V/K.
    const codes = (change: Partial<Coefficients>) => codesOf(lotOf(() => change));
    expect(codes({ gainTc: -0.005 })).toEqual(["import.not_measured"]);
    expect(codes({ gainTc: -0.00501 })).toContain("import.unit_suspect");
    expect(codes({ zeroTc: 0.01 })).toEqual(["import.not_measured"]);
    expect(codes({ zeroTc: 0.0101 })).toContain("import.unit_suspect");
  });

  it("tells a gainTc further from the sample's mean than the pooling limit, and not one at it", () => {
    const derived = derivedOf(lotOf());
    const { gainTc: mean = 0, limit = 0 } = derived.pooled ?? {};
    const at = (gainTc: number) =>
      codesOf(
        lotOf(() => ({ gainTc })),
        derived,
      );
    expect(at(mean + limit)).toEqual(["import.not_measured"]);
    expect(at(mean + limit * 1.001)).toContain("import.beyond_limit");
  });

  it("tells gains far from 1 once, the furthest with how many", () => {
    const found = importFindings(
      lotOf((i) => (i < 3 ? { gain: 1.5 + i / 10 } : { gain: 1.2 })),
      family,
      null,
    );
    const far = found.filter((one) => one.code === "gain.far_from_nominal");
    expect(far).toMatchObject([{ severity: "soft", serial: null, data: { gain: 1.7, devices: 3 } }]);
    expect(far[0]?.message).toContain("3 devices");
  });
});

describe("siblings", () => {
  const scattered = (odd: Partial<Coefficients> = {}) =>
    Array.from({ length: 40 }, (_, i) =>
      set(`S${i}`, {
        zero: 0.01 * normal(),
        zeroTc: 2e-5 * normal(),
        gain: 1 + 0.008 * normal(),
        gainTc: -4e-4 + 1.5e-6 * normal(),
        tempOffset: -230 + normal(),
        ...(i === 5 && odd),
      }),
    );

  it("are compared as derived ones are", () => {
    expect(codesOf(scattered())).toEqual(["import.not_measured"]);
    const found = importFindings(scattered({ gainTc: -3.5e-4 }), family, null);
    expect(found[1]).toMatchObject({ code: "coefficient.outlier", serial: "S5", data: { coefficient: "gainTc" } });
    expect(codesOf(scattered({ gainTc: 4e-4 }))).toContain("coefficient.sign_unlike");
    expect(codesOf(scattered({ tempOffset: -190 }))).toContain("thermometer.off_siblings");
  });
});
