import { describe, expect, it } from "vitest";
import { checkCoverage } from "@/lib/domain/package-checks/coverage";

const whole = { lotDevices: 28, packed: 28, leftOut: [], newerUndecided: [], otherBoard: [] };

describe("coverage", () => {
  it("passes where every device of the lot is packed", () => {
    expect(checkCoverage(whole)).toMatchObject({
      code: "coverage",
      verdict: "pass",
      message: "All 28 devices of the lot are packed.",
    });
  });

  it("names who is left out and why, by reason", () => {
    const check = checkCoverage({
      ...whole,
      lotDevices: 31,
      leftOut: [
        { serial: "B-1", reason: "held" },
        { serial: "B-2", reason: "stale" },
        { serial: "B-3", reason: "held" },
      ],
    });
    expect(check.verdict).toBe("warn");
    expect(check.message).toBe(
      "28 of 31 devices are packed. Left out: 2 held (B-1, B-3); 1 with stale coefficients (B-2).",
    );
    expect(check.evidence.leftOut).toEqual([
      { reason: "held", count: 2, serials: ["B-1", "B-3"] },
      { reason: "stale", count: 1, serials: ["B-2"] },
    ]);
  });

  it("warns where a newer set waits for a decision or another board is reported, though all are packed", () => {
    expect(checkCoverage({ ...whole, newerUndecided: ["B-1"] }).verdict).toBe("warn");
    expect(checkCoverage({ ...whole, otherBoard: ["B-1"] })).toMatchObject({
      verdict: "warn",
      message: expect.stringContaining("In 1 device another board is reported than the one that was measured (B-1)."),
    });
  });

  it("keeps the evidence of a large lot bounded, with whole counts", () => {
    const leftOut = Array.from({ length: 50_000 }, (_, i) => ({ serial: `S${i}`, reason: "undecided" as const }));
    const check = checkCoverage({ ...whole, lotDevices: 50_028, leftOut });
    expect(JSON.stringify(check).length).toBeLessThan(5_000);
    expect(check.evidence.leftOut).toMatchObject([{ count: 50_000 }]);
    expect(check.message).toContain("50,000 with coefficients still to be decided (S0, S1, S2 and 49,997 more)");
  });
});
