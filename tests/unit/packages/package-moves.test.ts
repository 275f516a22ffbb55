import { describe, expect, it } from "vitest";
import {
  hindranceOf,
  movesOf,
  openWarnings,
  type PackageForMoves,
} from "@/app/(site)/packages/[package]/package-moves";

const check = (code: string, verdict: "pass" | "warn" | "fail") => ({ code, verdict, message: "", evidence: {} });
const waiver = (code: string) => ({ check: code, by: "Rita", reason: "fine", at: "2026-12-01T00:00:00.000Z" });

const pkg = (change: Partial<PackageForMoves> = {}): PackageForMoves => ({
  id: "01890000-0000-7000-8000-000000000000",
  lot: "MW20-2609",
  version: "1.2.0",
  state: "draft",
  checks: [check("coverage", "pass")],
  waivers: [],
  mayDecide: false,
  mayTakeBack: false,
  against: null,
  ...change,
});

const names = (...args: Parameters<typeof movesOf>) =>
  movesOf(...args).map((action) => ("move" in action ? action.move : action.words));

describe("what can be done with a package", () => {
  it("is never more than two things", () => {
    const states = [
      "building",
      "draft",
      "failed",
      "in-review",
      "approved",
      "refused",
      "live",
      "superseded",
      "withdrawn",
    ] as const;
    const roles = ["engineer", "reviewer", "auditor", "admin"] as const;
    for (const state of states) {
      const shown = movesOf(pkg({ state, mayDecide: true, mayTakeBack: true }), roles, false);
      expect(shown.length, state).toBeLessThanOrEqual(2);
    }
  });

  it("of a draft is asking for review, by an engineer only", () => {
    expect(names(pkg(), ["engineer"], false)).toEqual(["Build again", "submit"]);
    expect(names(pkg(), ["reviewer"], false)).toEqual([]);
    expect(names(pkg(), ["admin"], false)).toEqual([]);
  });

  it("under review is the review for who may decide, taking back for who asked", () => {
    expect(names(pkg({ state: "in-review", mayDecide: true }), ["reviewer"], false)).toEqual(["Review 1.2.0"]);
    expect(names(pkg({ state: "in-review", mayTakeBack: true }), ["engineer"], false)).toEqual(["take-back"]);
    expect(names(pkg({ state: "in-review" }), ["reviewer"], false)).toEqual([]);
  });

  it("once live is withdrawing, for engineers and reviewers", () => {
    expect(names(pkg({ state: "live" }), ["reviewer"], false)).toEqual(["Download bundle", "withdraw"]);
    expect(names(pkg({ state: "live" }), ["auditor"], false)).toEqual(["Download bundle"]);
  });

  it("withdrawn leaves its bundle to auditors", () => {
    expect(names(pkg({ state: "withdrawn" }), ["engineer"], false)).toEqual(["Build again"]);
    expect(names(pkg({ state: "withdrawn" }), ["auditor"], false)).toEqual(["Download bundle"]);
  });

  it("superseded is asking for it again, unless a request waits already", () => {
    const [, free] = movesOf(pkg({ state: "superseded" }), ["engineer"], false);
    const [, waiting] = movesOf(pkg({ state: "superseded" }), ["engineer"], true);
    expect(free).toEqual({ move: "reinstate", hindrance: undefined });
    expect(waiting).toMatchObject({ move: "reinstate", hindrance: expect.stringContaining("waits") });
  });
});

describe("what stands against asking for review", () => {
  it("is nothing where all pass or are waived", () => {
    const checks = [check("coverage", "warn"), check("limits", "pass")];
    expect(hindranceOf({ checks, waivers: [waiver("coverage")] })).toBeUndefined();
  });

  it("is a warning without a waiver", () => {
    const checks = [check("coverage", "warn"), check("pooling", "warn")];
    expect(openWarnings({ checks, waivers: [waiver("coverage")] }).map((one) => one.code)).toEqual(["pooling"]);
    expect(hindranceOf({ checks, waivers: [waiver("coverage")] })).toMatch(/^One warning/);
    expect(hindranceOf({ checks, waivers: [] })).toMatch(/^2 warnings/);
  });

  it("is a failed check before all, waived or not", () => {
    const checks = [check("limits", "fail"), check("coverage", "warn")];
    expect(hindranceOf({ checks, waivers: [waiver("limits")] })).toMatch(/^A check fails/);
  });
});
