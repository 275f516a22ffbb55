import { describe, expect, it } from "vitest";
import { numberPackage } from "@/lib/domain/package-number";

const serials = ["A", "B"];
const built = { version: "1.2.3", layoutVersion: "1.0.0", serials };

describe("a package's number", () => {
  it("begins with 1.0.0", () => {
    expect(numberPackage({ highest: null, compared: null, next: { layoutVersion: "2.1.3", serials } })).toBe("1.0.0");
  });

  it.each([
    ["1.2.4", "nothing but values changed", { layoutVersion: "1.0.0", serials: ["B", "A"] }],
    ["1.3.0", "devices changed", { layoutVersion: "1.0.0", serials: ["A", "C"] }],
    ["1.3.0", "the layout's minor changed", { layoutVersion: "1.1.0", serials }],
    ["1.3.0", "the layout's patch changed", { layoutVersion: "1.0.1", serials }],
    ["2.0.0", "the layout's major changed", { layoutVersion: "2.0.0", serials }],
  ])("is %s after 1.2.3 where %s", (expected, _why, next) => {
    expect(numberPackage({ highest: "1.2.3", compared: built, next })).toBe(expected);
  });

  it("is raised by a step asked for, never lowered", () => {
    const next = { layoutVersion: "1.0.0", serials };
    expect(numberPackage({ highest: "1.2.3", compared: built, next, step: "major" })).toBe("2.0.0");
    const changed = { layoutVersion: "2.0.0", serials };
    expect(numberPackage({ highest: "1.2.3", compared: built, next: changed, step: "patch" })).toBe("2.0.0");
  });

  it("passes over numbers that failed builds used up, and stays a step as large as needed", () => {
    const next = { layoutVersion: "2.0.0", serials };
    expect(numberPackage({ highest: "2.0.0", compared: built, next })).toBe("2.0.1");
    const patch = { layoutVersion: "1.0.0", serials };
    expect(numberPackage({ highest: "1.3.0", compared: built, next: patch })).toBe("1.3.1");
    expect(numberPackage({ highest: "1.0.0", compared: null, next })).toBe("1.0.1");
  });
});
