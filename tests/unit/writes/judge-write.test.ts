import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { flagsOf, type KnownTarget, outcomeOf, type ReportedWrite } from "@/lib/domain/writes/judge-write";

const IMAGE = "a".repeat(64);
const OTHER = "b".repeat(64);
const FINISHED = new Date("2026-12-01T10:00:00Z");

const good: ReportedWrite = {
  serial: "MW20-1",
  imageSha256: IMAGE,
  result: "written",
  readbackSha256: IMAGE,
  finishedAt: FINISHED,
};
const known: KnownTarget = {
  device: { hardwareId: null, held: false, scrapped: false, stationMayWrite: true },
  image: { sha256: IMAGE, hardwareId: null, firmware: "2.3.0", zeroMvV: (u) => 0.01 + 0.0001 * u, nominalMvV: 2 },
  liveWhenFinished: true,
};
const flags = (write: Partial<ReportedWrite> = {}, target: Partial<KnownTarget> = {}, receivedAt = FINISHED) =>
  flagsOf({ ...good, ...write }, { ...known, ...target }, receivedAt);
const later = (ms: number) => new Date(FINISHED.getTime() + ms);
const MINUTE = 60_000;

describe("outcomeOf", () => {
  it.each([
    ["verified", {}, {}],
    ["mismatch", { readbackSha256: OTHER }, {}],
    ["mismatch", { readbackSha256: null }, {}],
    ["failed", { result: "failed" }, {}],
    ["interrupted", { result: "interrupted", readbackSha256: null }, {}],
    ["interrupted", { result: "interrupted" }, {}],
    ["unknown-image", { imageSha256: OTHER, readbackSha256: OTHER }, {}],
    ["unknown-image", {}, { image: undefined }],
    ["unknown-serial", {}, { device: undefined }],
    ["unknown-serial", { result: "failed" }, { device: undefined, image: undefined }],
  ] as [string, Partial<ReportedWrite>, Partial<KnownTarget>][])("is %s for %j", (outcome, write, target) => {
    expect(outcomeOf({ ...good, ...write }, { ...known, ...target })).toBe(outcome);
  });
});

describe("flagsOf", () => {
  it("flags nothing where all is as it should be", () => {
    expect(flags()).toEqual([]);
    expect(
      flags({ serialBefore: "MW20-1", hardwareId: "B1", firmware: "2.3.0", zeroMvV: 0.0125, deviceTemp: 25 }),
    ).toEqual([]);
  });

  it.each([
    ["not-live", {}, { liveWhenFinished: false }],
    ["held", {}, { device: { ...known.device, held: true } }],
    ["scrapped", {}, { device: { ...known.device, scrapped: true } }],
    ["station-not-allowed", {}, { device: { ...known.device, stationMayWrite: false } }],
    ["serial-differs", { serialBefore: "MW20-2" }, {}],
    ["board-changed", { hardwareId: "B2" }, { device: { ...known.device, hardwareId: "B1" } }],
    ["board-changed", { hardwareId: "B1" }, { image: { ...known.image, hardwareId: "B0" } }],
    ["firmware-differs", { firmware: "2.3.1" }, {}],
    ["firmware-differs", { firmware: "two" }, {}],
    ["no-readback", { readbackSha256: null }, {}],
  ] as [string, Partial<ReportedWrite>, Partial<KnownTarget>][])("flags %s", (flag, write, target) => {
    expect(flags(write, target)).toEqual([flag]);
  });

  it("flags a record as late after one hour and a clock as ahead by more than five minutes", () => {
    expect(flags({}, {}, later(60 * MINUTE))).toEqual([]);
    expect(flags({}, {}, later(60 * MINUTE + 1))).toEqual(["late"]);
    expect(flags({}, {}, later(-5 * MINUTE))).toEqual([]);
    expect(flags({}, {}, later(-5 * MINUTE - 1))).toEqual(["clock-ahead"]);
  });

  it("flags a zero that is more than one per cent of nominal output from the device's own curve", () => {
    const at = (zeroMvV: number) => flags({ zeroMvV, deviceTemp: 25 });
    expect(at(0.0125 + 0.0199)).toEqual([]);
    expect(at(0.0125 + 0.0201)).toEqual(["zero-off"]);
    expect(at(0.0125 - 0.0201)).toEqual(["zero-off"]);
    expect(flags({ zeroMvV: 1 })).toEqual([]);
    expect(
      flags({ zeroMvV: 1, deviceTemp: 25 }, { image: { ...(known.image as object), zeroMvV: null } as never }),
    ).toEqual([]);
  });

  it("says nothing about a readback where nothing was written", () => {
    expect(flags({ result: "failed", readbackSha256: null })).toEqual([]);
  });
});

const digest = fc.constantFrom(IMAGE, OTHER);
const word = fc.constantFrom("B1", "B2", "MW20-1", "2.3.0", "2.4.0");
const write: fc.Arbitrary<ReportedWrite> = fc.record({
  serial: fc.constant("MW20-1"),
  imageSha256: digest,
  result: fc.constantFrom("written" as const, "failed" as const, "interrupted" as const),
  readbackSha256: fc.option(digest),
  serialBefore: fc.option(word),
  hardwareId: fc.option(word),
  firmware: fc.option(word),
  zeroMvV: fc.option(fc.double({ noNaN: true, noDefaultInfinity: true })),
  deviceTemp: fc.option(fc.double({ noNaN: true, noDefaultInfinity: true })),
  finishedAt: fc.date({ noInvalidDate: true }),
});
const target: fc.Arbitrary<KnownTarget> = fc.record({
  device: fc.option(
    fc.record({
      hardwareId: fc.option(word),
      held: fc.boolean(),
      scrapped: fc.boolean(),
      stationMayWrite: fc.boolean(),
    }),
    { nil: undefined },
  ),
  image: fc.option(
    fc.record({
      sha256: digest,
      hardwareId: fc.option(word),
      firmware: word,
      zeroMvV: fc.constantFrom(null, (u: number) => u / 1000),
      nominalMvV: fc.constantFrom(1, 2, 3),
    }),
    { nil: undefined },
  ),
  liveWhenFinished: fc.boolean(),
});
const received = fc.date({ noInvalidDate: true });

describe("whatever a station reports", () => {
  it("is verified only where known bytes of a known device were written and read back", () => {
    fc.assert(
      fc.property(write, target, (w, k) => {
        const proven =
          k.device !== undefined &&
          k.image?.sha256 === w.imageSha256 &&
          w.result === "written" &&
          w.readbackSha256 === k.image.sha256;
        expect(outcomeOf(w, k) === "verified").toBe(proven);
      }),
    );
  });

  it("gets each flag once, in one order, and the same flags again", () => {
    const order = [
      "not-live",
      "late",
      "clock-ahead",
      "held",
      "scrapped",
      "station-not-allowed",
      "serial-differs",
      "board-changed",
      "firmware-differs",
      "zero-off",
      "no-readback",
    ];
    fc.assert(
      fc.property(write, target, received, (w, k, at) => {
        const found = flagsOf(w, k, at);
        expect(found).toEqual(order.filter((flag) => found.includes(flag)));
        expect(flagsOf(w, k, at)).toEqual(found);
      }),
    );
  });

  it("is never late and ahead at once, and flagged not live exactly where it was not", () => {
    fc.assert(
      fc.property(write, target, received, (w, k, at) => {
        const found = flagsOf(w, k, at);
        expect(found.includes("late") && found.includes("clock-ahead")).toBe(false);
        expect(found.includes("not-live")).toBe(!k.liveWhenFinished);
      }),
    );
  });
});
