import { describe, expect, it } from "vitest";
import type { PooledResult, VerificationResult } from "@/lib/domain/compensation/types";
import { checkPooling } from "@/lib/domain/package-checks/pooling";
import { checkProvenRange } from "@/lib/domain/package-checks/proven-range";
import { checkTwin as check, type TwinPrediction, type TwinRangeFacts } from "@/lib/domain/package-checks/twin";
import { checkVerification } from "@/lib/domain/package-checks/verification";

const pooled: PooledResult = {
  gainTc: -4.1788e-4,
  sd: 1.4e-6,
  n: 10,
  meanGain: 1.002,
  sdGain: 0.01,
  confidenceInterval: [-4.189e-4, -4.168e-4],
  toleranceInterval: [-4.227e-4, -4.131e-4],
  toleranceFactor: 3.39342948,
  coverage: 0.95,
  confidence: 0.95,
  limit: 1.225e-5,
  verdict: "inside",
};

describe("pooling", () => {
  it("passes inside, in figures", () => {
    expect(checkPooling([{ id: "d", pooled }])).toMatchObject({
      verdict: "pass",
      message:
        "Mean of gainTc over 10 sample devices −417.88 ppm/K; 95 % of the lot is expected within ±4.75 ppm/K (95 % confidence), inside the limit ±12.25 ppm/K.",
    });
  });

  it("warns outside, where it was not judged, and where one of several is outside", () => {
    expect(checkPooling([{ id: "d", pooled: { ...pooled, verdict: "outside" } }]).verdict).toBe("warn");
    const single = { ...pooled, n: 1, sd: null, toleranceFactor: null, verdict: "not-judged" as const };
    expect(checkPooling([{ id: "d", pooled: single }])).toMatchObject({
      verdict: "warn",
      message: expect.stringContaining("its spread could not be judged"),
    });
    expect(
      checkPooling([
        { id: "a", pooled },
        { id: "b", pooled: { ...pooled, verdict: "outside" } },
      ]).verdict,
    ).toBe("warn");
  });

  it("has nothing to say of individual trims", () => {
    expect(checkPooling([])).toMatchObject({ verdict: "pass", message: expect.stringContaining("No pooled gain") });
  });
});

const result = (serial: string, passed: boolean | null): VerificationResult => ({
  serial,
  spanErrorPpm: 10,
  spanRatio: 0.1,
  zeroShiftRatio: null,
  passed,
  judged: passed === null ? [] : ["spanRatio"],
});

describe("verification", () => {
  const five = ["A", "B", "C", "D", "E"].map((serial) => result(serial, true));

  // 1 − 0.95 = 0.05; 0.05^(1/5) = 0.5493: product.md's own figure, by hand.
  it("says which share of the lot is shown", () => {
    expect(checkVerification([{ id: "d", method: "pooled-gain", verification: five }], 0.95)).toMatchObject({
      verdict: "pass",
      message:
        "5 of 5 verification devices passed: by itself that shows, with 95 % confidence, only that at least 54.9 % of the lot would.",
    });
  });

  it("warns for a device outside, for none, and for imported values", () => {
    const failed = [...five.slice(1), result("A", false)];
    expect(checkVerification([{ id: "d", method: "pooled-gain", verification: failed }], 0.95)).toMatchObject({
      verdict: "warn",
      message: "1 of 5 verification devices are outside the envelope (A).",
    });
    expect(checkVerification([{ id: "d", method: "pooled-gain", verification: [] }], 0.95).verdict).toBe("warn");
    const unjudged = [result("A", null)];
    expect(checkVerification([{ id: "d", method: "pooled-gain", verification: unjudged }], 0.95).verdict).toBe("warn");
    expect(checkVerification([{ id: "d", method: "import", verification: [] }], 0.95).verdict).toBe("warn");
  });

  it("asks no verification of individual trims", () => {
    expect(checkVerification([{ id: "d", method: "individual", verification: [] }], 0.95).verdict).toBe("pass");
  });
});

describe("proven range", () => {
  const facts = { temperatureMinC: 10, temperatureMaxC: 40, unprovenDevices: 0 };

  it("passes where the family's range lies inside, ends included", () => {
    expect(checkProvenRange({ ...facts, provenRange: [8.06, 41.9] }).verdict).toBe("pass");
    expect(checkProvenRange({ ...facts, provenRange: [10, 40] }).verdict).toBe("pass");
  });

  it("warns with the temperatures that nothing is claimed for", () => {
    expect(checkProvenRange({ ...facts, provenRange: [12.5, 38] })).toMatchObject({
      verdict: "warn",
      message:
        "The family works from 10 to 40 °C; proven is 12.5 to 38 °C: nothing is claimed from 10 to 12.5 °C and from 38 to 40 °C.",
    });
    expect(checkProvenRange({ ...facts, provenRange: null }).evidence.gaps).toEqual([[10, 40]]);
    expect(checkProvenRange({ ...facts, provenRange: [50, 60] }).evidence.gaps).toEqual([[10, 40]]);
  });

  it("writes a true minus sign", () => {
    const { message } = checkProvenRange({ ...facts, temperatureMinC: -10, provenRange: [-8.5, 40] });
    expect(message).toContain("works from \u221210 to 40 °C; proven is \u22128.5 to 40 °C");
    expect(message).toContain("nothing is claimed from \u221210 to \u22128.5 °C");
  });

  it("warns of devices with imported values beside a proven range", () => {
    expect(checkProvenRange({ ...facts, provenRange: [5, 45], unprovenDevices: 2 })).toMatchObject({
      verdict: "warn",
      message: expect.stringContaining("2 devices rest on imported values"),
    });
  });
});

const noOverflow: TwinRangeFacts = { overflows: [], overflowCount: 0, spanRounding: null, zeroRounding: null };
const checkTwin = (packed: number, predictions: readonly TwinPrediction[], range = noOverflow) =>
  check(packed, predictions, range);

const prediction = (serial: string, change: Partial<TwinPrediction> = {}): TwinPrediction => ({
  serial,
  spanErrorPpm: 100,
  spanRatio: 0.3,
  spanAtC: 40.02,
  spanRoundingPpm: -0.24,
  largestRoundingPpm: 0.3,
  zeroShiftRatio: null,
  zeroBetweenC: null,
  zeroRoundingRatio: null,
  independent: true,
  ...change,
});

describe("twin", () => {
  it("passes inside and names the largest errors", () => {
    const predictions = [prediction("A"), prediction("B", { spanErrorPpm: -200, spanRatio: 0.6, zeroShiftRatio: 0.9 })];
    expect(checkTwin(2, predictions)).toMatchObject({
      verdict: "pass",
      message:
        "Computed with its decoded values, each of 2 devices with readings to judge it stays inside the envelope. Largest span error −200 ppm, 0.60 of the limit (B at 40.0 °C); 0.2 ppm of it are rounding. Largest zero shift 0.90 of the limit (B). Zero of 1 device is not judged: no reading is left beside those that the zero was fitted through.",
    });
    const all = predictions.map((one) => ({ ...one, zeroShiftRatio: 0.1 }));
    expect(checkTwin(2, all).message).not.toContain("not judged");
  });

  it("warns outside, on span or zero, exactly above 1", () => {
    expect(checkTwin(1, [prediction("A", { spanRatio: 1 })]).verdict).toBe("pass");
    expect(checkTwin(1, [prediction("A", { spanRatio: 1.001 })]).verdict).toBe("warn");
    expect(checkTwin(1, [prediction("A", { zeroShiftRatio: 1.001 })])).toMatchObject({
      verdict: "warn",
      evidence: { outside: { count: 1, serials: ["A"] } },
    });
  });

  it("names the worst device with its temperature, and the part of rounding", () => {
    const { evidence } = checkTwin(2, [prediction("A"), prediction("B", { spanRatio: 0.6, largestRoundingPpm: 0.1 })]);
    expect(evidence).toMatchObject({ span: { serial: "B", spanAtC: 40.02 }, rounding: { serial: "A", ppm: 0.3 } });
  });

  it("fails where the arithmetic overflows over the family's temperatures", () => {
    const overflows = [{ serial: "C", quantity: "gain", atC: -10 }];
    const failed = checkTwin(1, [prediction("A")], { ...noOverflow, overflows, overflowCount: 3 });
    expect(failed).toMatchObject({
      verdict: "fail",
      message: expect.stringContaining("the arithmetic of 3 devices overflows: gain of C at −10.0 °C."),
    });
  });

  it("never calls a device inside that was never loaded, or loaded only where its gain was taken from", () => {
    const check = checkTwin(3, [
      prediction("A"),
      prediction("B", { spanErrorPpm: null, spanRatio: null, independent: false }),
      prediction("C", { spanErrorPpm: 0, spanRatio: 0, independent: false }),
    ]);
    expect(check.message).toContain("each of 1 device with readings");
    expect(check.message).toContain("1 device was never loaded (B): no statement on span.");
    expect(check.message).toContain("1 device was loaded only where the gain was taken from");
    expect(check.evidence).toMatchObject({ judged: 1, spanJudged: 1, atTrimPointOnly: 1 });
  });

  it("warns where there is no reading at all, and says where none is left to judge", () => {
    expect(checkTwin(4, [])).toMatchObject({ verdict: "warn", evidence: { withoutReadings: 4 } });
    expect(checkTwin(1, [prediction("A", { independent: false })])).toMatchObject({
      verdict: "pass",
      message: expect.stringContaining("none is left to judge them"),
    });
  });
});
