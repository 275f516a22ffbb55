import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { checkDecidedSets } from "@/lib/domain/package-checks/decided-sets";
import { checkEqualImages } from "@/lib/domain/package-checks/equal-images";
import { checkFirmware } from "@/lib/domain/package-checks/firmware";
import {
  checkLiveDifference,
  type FieldMoves,
  type LiveDifferenceFacts,
} from "@/lib/domain/package-checks/live-difference";
import { checkOutliers, robustSpread } from "@/lib/domain/package-checks/outliers";
import { checkRepeatability } from "@/lib/domain/package-checks/repeatability";
import { checkReservedBytes } from "@/lib/domain/package-checks/reserved-bytes";
import { DEFAULT_THRESHOLDS, thresholdsOf } from "@/lib/domain/package-checks/thresholds";

describe("decided sets", () => {
  const facts = { packed: 3, notApproved: [], newerUndecided: [], leftOut: [] };

  it("pass while every packed one is approved, and tell what waits or lapsed", () => {
    expect(checkDecidedSets(facts)).toMatchObject({
      verdict: "pass",
      message: "The coefficients of 3 devices are approved.",
    });
    const leftOut = [
      { serial: "S", reason: "stale" },
      { serial: "H", reason: "held" },
    ];
    expect(checkDecidedSets({ ...facts, newerUndecided: ["N"], leftOut })).toMatchObject({
      verdict: "pass",
      message:
        "The coefficients of 3 devices are approved. Newer ones of 1 device wait for a decision (N). Left out: 1 stale (S).",
      evidence: { leftOut: [{ reason: "stale", count: 1 }] },
    });
  });

  it("fail for a set that is not approved", () => {
    expect(checkDecidedSets({ ...facts, notApproved: [{ serial: "A", state: "revoked" }] })).toMatchObject({
      verdict: "fail",
      evidence: { notApproved: { count: 1, serials: ["A"] } },
    });
  });
});

describe("firmware", () => {
  const facts = { firmware: "2.3.0", range: ">=2.1.0 <3.0.0", packed: 4, others: [] };

  it("passes inside, warns of devices outside, fails for the lot", () => {
    expect(checkFirmware(facts).verdict).toBe("pass");
    expect(checkFirmware({ ...facts, others: [{ serial: "A", firmware: "2.9.0" }] })).toMatchObject({
      verdict: "pass",
      evidence: { others: 1, outside: { count: 0 } },
    });
    expect(checkFirmware({ ...facts, others: [{ serial: "A", firmware: "3.0.0" }] })).toMatchObject({
      verdict: "warn",
      evidence: { outside: { count: 1, items: [{ serial: "A", firmware: "3.0.0" }] } },
    });
    expect(checkFirmware({ ...facts, firmware: "2.0.9" }).verdict).toBe("fail");
  });
});

describe("reserved bytes", () => {
  const ranges = [[10, 19]] as const;
  const facts = { devices: 2, ranges, fill: 255, faults: [], faultCount: 0 };

  it("pass at the fill, and where none are reserved", () => {
    expect(checkReservedBytes(facts)).toMatchObject({
      verdict: "pass",
      message: "The 10 bytes that no field claims hold the fill FF in the images of 2 devices.",
    });
    expect(checkReservedBytes({ ...facts, ranges: [] }).message).toBe("The layout leaves no byte reserved.");
  });

  it("fail with the place", () => {
    expect(checkReservedBytes({ ...facts, faults: [{ serial: "A", at: 12, byte: 0 }], faultCount: 5 })).toMatchObject({
      verdict: "fail",
      message: "5 reserved bytes are not at the fill FF: offset 12 of A holds 00.",
    });
  });
});

describe("outliers", () => {
  const field = (values: number[]) => ({ name: "zero", unit: "mV/V", values: Float64Array.from(values) });
  const serials = ["A", "B", "C", "D", "E", "F", "G"];

  // By hand: median 3, deviations 2 1 1 0 0 1 97, their median 1, times 1.4826.
  it("judge by the median and its absolute deviation", () => {
    const values = field([1, 2, 4, 3, 3, 4, 100]);
    expect(robustSpread(values.values)).toEqual({ median: 3, deviation: 1.482602218505602 });
    const check = checkOutliers({ serials, fields: [values], threshold: 8 });
    expect(check).toMatchObject({
      verdict: "warn",
      message: "1 value stands out by more than 8 robust standard deviations, most zero of G by 65.4.",
    });
    expect(check.evidence).toMatchObject({
      outliers: { count: 1, items: [{ serial: "G", field: "zero", value: 100 }] },
      fields: [{ name: "zero", median: 3, serial: "G" }],
    });
  });

  it("say nothing of few values, of equal ones, and of what is no number", () => {
    expect(checkOutliers({ serials, fields: [field([1, 2, 3, 100])], threshold: 3 }).verdict).toBe("pass");
    expect(checkOutliers({ serials, fields: [field([1, 1, 1, 1, 1, 1, 100])], threshold: 3 })).toMatchObject({
      verdict: "pass",
      message: "No field has a spread to stand out from.",
    });
    const holes = field([1, 2, 4, 3, Number.NaN, 4, 3]);
    expect(checkOutliers({ serials, fields: [holes], threshold: 8 })).toMatchObject({ verdict: "pass" });
  });

  it("do not depend on the order, the place or the unit of the values", () => {
    const values = fc.array(fc.integer({ min: -1000, max: 1000 }), { minLength: 5, maxLength: 30 });
    fc.assert(
      fc.property(values, fc.integer({ min: -50, max: 50 }), fc.constantFrom(2, 4, -8), (list, shift, factor) => {
        const names = list.map((_, i) => `S${i}`);
        const verdict = (of: number[]) =>
          checkOutliers({ serials: names, fields: [field(of)], threshold: 4 }).evidence.outliers;
        const count = (verdict(list) as { count: number }).count;
        expect(verdict([...list].reverse())).toMatchObject({ count });
        expect(verdict(list.map((value) => value * factor + shift))).toMatchObject({ count });
      }),
    );
  });
});

describe("equal images", () => {
  it("warn of copies", () => {
    expect(checkEqualImages({ devices: 9, groups: [] }).verdict).toBe("pass");
    expect(checkEqualImages({ devices: 9, groups: [["A", "B"]] })).toMatchObject({
      verdict: "warn",
      message: "1 group of devices holds the same bytes apart from serial and checksums: A, B.",
      evidence: { groups: { count: 1, items: [["A", "B"]] } },
    });
    const two = checkEqualImages({
      devices: 9,
      groups: [
        ["A", "B"],
        ["C", "D"],
      ],
    });
    expect(two.message).toMatch(/^2 groups of devices hold .* checksums; the first is A, B\.$/);
  });
});

describe("repeatability", () => {
  const facts = { devices: 2, digest: "aa", repeated: "aa", differing: [] };

  it("passes on the same digest, fails on another or on any image", () => {
    expect(checkRepeatability(facts).verdict).toBe("pass");
    expect(checkRepeatability({ ...facts, repeated: "bb" }).verdict).toBe("fail");
    expect(checkRepeatability({ ...facts, differing: ["A"] })).toMatchObject({
      verdict: "fail",
      message: "Composed twice, the package came out otherwise: 1 image (A).",
    });
  });
});

const moves = (change: Partial<FieldMoves> = {}): FieldMoves => ({
  name: "gain",
  unit: "1",
  devices: 2,
  largest: { serial: "A", from: 1, to: 1.01, steps: 100 },
  room: 0.4,
  signFlips: [],
  signMatters: true,
  ...change,
});

describe("difference against what is live", () => {
  const facts: LiveDifferenceFacts = {
    live: { id: "l", version: "1.0.0", digest: "aa" },
    packed: 10,
    added: 0,
    removed: 0,
    values: 2,
    versionOnly: 8,
    same: 0,
    fields: [moves()],
    thresholds: thresholdsOf({}),
  };

  it("passes where nothing is live", () => {
    expect(checkLiveDifference({ ...facts, live: null })).toMatchObject({ verdict: "pass", evidence: { live: null } });
  });

  it("tells share, fields and the largest step as a share of its room", () => {
    expect(checkLiveDifference(facts)).toMatchObject({
      verdict: "pass",
      message:
        "Against 1.0.0, live when this was built: 2 of 10 devices change values in 1 field; 8 version numbers only.",
      evidence: { share: 0.2, both: 10, fields: [{ name: "gain", shareOfRoom: expect.closeTo(0.025, 9) }] },
    });
  });

  it("warns beyond each threshold, never on it", () => {
    const thresholds = { ...facts.thresholds, differenceShareWarn: 0.2 };
    expect(checkLiveDifference({ ...facts, thresholds }).verdict).toBe("pass");
    expect(checkLiveDifference({ ...facts, values: 3, versionOnly: 7, thresholds }).verdict).toBe("warn");
    const far = moves({ largest: { serial: "A", from: 1, to: 1.06, steps: 600 } });
    expect(checkLiveDifference({ ...facts, fields: [far] })).toMatchObject({
      verdict: "warn",
      message: expect.stringContaining("gain of A changes by 15.0 % of the room between its limits."),
    });
    expect(checkLiveDifference({ ...facts, fields: [{ ...far, room: null }] }).verdict).toBe("pass");
    const flipped = moves({ signFlips: ["B"] });
    expect(checkLiveDifference({ ...facts, fields: [flipped] })).toMatchObject({
      verdict: "warn",
      message: expect.stringContaining("The sign of gain changes in 1 device (B)."),
    });
    expect(checkLiveDifference({ ...facts, fields: [{ ...flipped, signMatters: false }] }).verdict).toBe("pass");
  });
});

describe("thresholds", () => {
  it("are the family's where it sets them, else the defaults", () => {
    expect(thresholdsOf({})).toEqual(DEFAULT_THRESHOLDS);
    expect(thresholdsOf({ checks: { outlierScore: 5 } })).toEqual({ ...DEFAULT_THRESHOLDS, outlierScore: 5 });
    expect(thresholdsOf({ checks: { outlierScore: undefined } })).toEqual(DEFAULT_THRESHOLDS);
  });
});
