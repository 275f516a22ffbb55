import { describe, expect, it } from "vitest";
import { chooseSet, type SetForPackage } from "@/lib/domain/package-selection";

const active = { held: false, scrapped: false, excluded: false };
const needs = { order: 1 as const, familyRevisionId: "rev" };
const set = (change: Partial<SetForPackage> = {}): SetForPackage => ({
  state: "approved",
  order: 1,
  familyRevisionId: "rev",
  ...change,
});

describe("which set a package takes of a device", () => {
  it("the newest where it is approved", () => {
    const newest = set();
    expect(chooseSet(active, newest, newest, needs)).toEqual({ set: newest, newerUndecided: false });
  });

  it("the approved one before an undecided one, and says so; before a refused one without a word", () => {
    const approved = set();
    expect(chooseSet(active, set({ state: "proposed" }), approved, needs)).toEqual({
      set: approved,
      newerUndecided: true,
    });
    expect(chooseSet(active, set({ state: "refused" }), approved, needs)).toEqual({
      set: approved,
      newerUndecided: false,
    });
  });

  it("none where the newest that was ever approved is stale or revoked", () => {
    for (const state of ["stale", "revoked"] as const) {
      const newest = set({ state });
      expect(chooseSet(active, newest, newest, needs)).toEqual({ leftOut: state });
    }
    expect(chooseSet(active, set({ state: "proposed" }), set({ state: "stale" }), needs)).toEqual({
      leftOut: "undecided",
    });
  });

  it("none of another order or family revision, of held or scrapped devices, or without any set", () => {
    const order2 = set({ order: 2 });
    const revision2 = set({ familyRevisionId: "other" });
    expect(chooseSet(active, order2, order2, needs)).toEqual({ leftOut: "other-order" });
    expect(chooseSet(active, revision2, revision2, needs)).toEqual({ leftOut: "other-revision" });
    expect(chooseSet({ ...active, held: true }, set(), set(), needs)).toEqual({ leftOut: "held" });
    expect(chooseSet({ ...active, held: true, scrapped: true }, set(), set(), needs)).toEqual({ leftOut: "scrapped" });
    expect(chooseSet(active, undefined, undefined, needs)).toEqual({ leftOut: "no-coefficients" });
    expect(chooseSet({ ...active, excluded: true }, undefined, undefined, needs)).toEqual({ leftOut: "excluded" });
    expect(chooseSet(active, set({ state: "proposed" }), undefined, needs)).toEqual({ leftOut: "undecided" });
    expect(chooseSet(active, set({ state: "refused" }), undefined, needs)).toEqual({ leftOut: "refused" });
  });
});
