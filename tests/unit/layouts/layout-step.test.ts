import { readFileSync } from "node:fs";
import { join } from "node:path";
import { describe, expect, it } from "vitest";
import { findStepBetween, layoutStep, newestLower } from "@/lib/domain/semver-step";
import type { LayoutDocument, LayoutField } from "@/schemas/documents/layout";
import { smallLayout } from "../builders/layouts";

const vectors = JSON.parse(readFileSync(join(import.meta.dirname, "../../fixtures/published/vectors.json"), "utf8"));
const before = smallLayout({ version: "1.4.0" });

/** Step and words of a change of the small layout. */
const judge = (change: Partial<LayoutDocument>) => {
  const { step, reasons } = layoutStep(before, { ...before, version: "2.0.0", ...change });
  return [step, ...reasons.map(({ path, message }) => `${path}: ${message}`)];
};
const field = (name: string, change: Partial<LayoutField>) => ({
  fields: before.fields.map((one) => (one.name === name ? { ...one, ...change } : one)),
});
/** The same JSON with the members of every object the other way round. */
function turned(value: unknown): unknown {
  if (Array.isArray(value)) return value.map(turned);
  if (typeof value !== "object" || value === null) return value;
  return Object.fromEntries(
    Object.entries(value)
      .reverse()
      .map(([name, inner]) => [name, turned(inner)]),
  );
}
const misread = "firmware that reads 1.x would misread it";

describe("layoutStep", () => {
  it("says what moved and what that does", () => {
    expect(judge(field("zeroTc", { at: 54 }))).toEqual([
      "major",
      `/fields/4/at: “zeroTc” moved from 28 to 54: ${misread}`,
    ]);
  });

  it("asks for a major step where old firmware would misread the image, naming both values", () => {
    expect(judge(field("gainTc", { scale: 2e-12 }))).toEqual([
      "major",
      `/fields/6/scale: the scale of “gainTc” is 2e-12 instead of 1e-12: ${misread}`,
    ]);
    expect(judge(field("gainTc", { type: "i24" }))[1]).toContain("the type of “gainTc” is i24 instead of i32");
    expect(judge(field("gainTc", { byteOrder: "big" }))[1]).toContain("is big instead of little");
    expect(judge(field("version", { value: { const: 7 } }))[1]).toContain("is the constant 7 instead of package.minor");
    expect(judge({ fields: before.fields.slice(0, -1) })).toEqual([
      "major",
      `/fields/7: “version” is gone from 40: ${misread}`,
    ]);
    expect(judge({ memory: { ...before.memory, fill: 0 } })[1]).toContain("the fill is 0 instead of 255");
    expect(judge({ kept: [[50, 51]] })[1]).toContain("what is kept is 50 to 51 instead of nothing");
    expect(judge({ checksums: [{ ...before.checksums[0], over: [0, 47] } as never] })[1]).toContain(
      "is 0 to 47 instead of 0 to 61",
    );
    expect(judge({ firmware: ">=1.0.0 <3.0.0" })[0]).toBe("major");
  });

  it("counts a member that it does not know", () => {
    expect(judge(field("version", { gloss: 3 } as never))).toEqual([
      "major",
      `/fields/7/gloss: “gloss” of “version” is 3 instead of none: ${misread}`,
    ]);
    expect(judge({ gloss: 3 } as never)[0]).toBe("major");
  });

  it("asks for a minor step where something is added in unused space or firmware is left out", () => {
    const spare: LayoutField = { name: "spare", at: 44, type: "u8", value: { const: 1 } };
    expect(judge({ fields: [...before.fields, spare] })).toEqual([
      "minor",
      "/fields/8: “spare” is new at 44, in space that was fill",
    ]);
    expect(judge({ firmware: ">=1.2.0 <2.0.0" })[0]).toBe("minor");
  });

  it("asks for a patch for texts and limits, and for what is only written differently", () => {
    expect(judge(field("gain", { max: 1.3 }))).toEqual([
      "patch",
      "/fields/5/max: the upper limit of “gain” is 1.3 instead of none",
    ]);
    expect(judge(field("gain", { name: "span" }))).toEqual([
      "patch",
      "/fields/5/name: “gain” is called “span”; its bytes are the same",
    ]);
    expect(judge(field("version", { scale: 1, bias: 0, byteOrder: "little" }))).toEqual(["patch"]);
    expect(judge({ firmware: "^1.0.0" })[0]).toBe("patch");
    expect(judge({ description: "A text" })[0]).toBe("patch");
    expect(judge({ reserved: [[50, 51]] })).toEqual([
      "patch",
      "/reserved: what is reserved changed; its bytes stay fill",
    ]);
    expect(judge({ reserved: [], kept: [] })).toEqual(["patch"]);
    expect(judge({ fields: [...before.fields].reverse() })).toEqual(["patch"]);
  });

  it("takes no notice of the order of members, which the database changes", () => {
    const rich = {
      ...before,
      memory: { ...before.memory, segments: [{ name: "upper", at: 40, baseAddress: 0x8000 }] },
      fields: [
        ...before.fields,
        {
          name: "flags",
          at: 44,
          type: "u16",
          value: { bits: [{ name: "mode", from: 0, width: 2, enum: { off: 0, on: 1 }, value: { const: "on" } }] },
        },
      ],
      checksums: [
        {
          name: "own",
          at: 46,
          algorithm: { width: 16, poly: "1021", init: "FFFF", refin: false, refout: false, xorout: "0" },
          over: [[0, 9]],
        },
      ],
    } as unknown as LayoutDocument;
    const stored = turned(rich) as LayoutDocument;
    expect(JSON.stringify(stored)).not.toBe(JSON.stringify(rich));
    expect(layoutStep(stored, rich)).toEqual({ step: "patch", reasons: [] });
    const renamed = rich.fields.map((one) => (one.name === "flags" ? { ...one, name: "marks" } : one));
    expect(layoutStep(stored, { ...rich, fields: renamed }).step).toBe("patch");
  });

  it("bears a firmware range that is half-typed", () => {
    expect(judge({ firmware: ">=1.0.0 <2.0." })).toEqual([
      "major",
      "/firmware: the firmware range is >=1.0.0 <2.0. instead of >=1.0.0 <2.0.0: that is no range of versions",
    ]);
  });

  it("has nothing to say without an earlier version", () => {
    expect(layoutStep(null, before)).toEqual({ step: null, reasons: [] });
  });
});

// SemVer 2.0.0, section 11: the specification's own example of precedence, in tests/fixtures/published/vectors.json.
describe("precedence of versions", () => {
  const rising = vectors.semver_ascending as string[];

  it("follows the published order, whichever order it is given in", () => {
    const published = [...rising].reverse().map((version) => ({ version }));
    rising.forEach((version, i) => {
      expect(newestLower(published, version)?.version).toBe(rising[i - 1]);
    });
  });

  it("goes up only", () => {
    for (let i = 1; i < rising.length; i++) {
      expect(findStepBetween(rising[i - 1] as string, rising[i] as string)).toBeDefined();
      expect(findStepBetween(rising[i] as string, rising[i - 1] as string)).toBeUndefined();
    }
    // Numerically, not as text (SemVer 2.0.0, section 11.4.1).
    expect(newestLower([{ version: "1.9.0" }, { version: "1.10.0" }], "2.0.0")?.version).toBe("1.10.0");
  });
});
