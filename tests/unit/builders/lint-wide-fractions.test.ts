import { describe, expect, it } from "vitest";
import { lintLayout } from "@/builders/codec/lint/lint";
import type { LayoutField } from "@/schemas/documents/layout";
import { smallLayout } from "./layouts";

function warned(change: Partial<LayoutField>) {
  const layout = smallLayout();
  const more = { name: "more", at: 48, type: "u64", value: { from: "coefficients.gain" }, ...change } as LayoutField;
  const { errors, warnings } = lintLayout({ ...layout, fields: [...layout.fields, more] });
  expect(errors).toEqual([]);
  return warnings.filter((one) => one.code === "field.fraction_lost");
}

describe("a coefficient in a 64-bit integer", () => {
  it("is warned about: it has no scale, so the fraction is lost", () => {
    expect(warned({})).toEqual([
      {
        path: "/fields/8/type",
        code: "field.fraction_lost",
        message:
          "“more” keeps whole numbers only: u64 has no scale, and coefficients.gain is a fraction. Take u32 with a scale, fixed, f32 or f64",
      },
    ]);
    expect(warned({ type: "i64", value: { from: "coefficients.zeroTc" } })[0]?.message).toMatch(/i64 .* Take i32/);
  });

  it("is not, where a type keeps fractions or the source is whole", () => {
    expect(warned({ type: "f64" })).toEqual([]);
    expect(warned({ type: "u32", scale: 1e-7 })).toEqual([]);
    expect(warned({ value: { from: "package.major" } })).toEqual([]);
    expect(warned({ value: { const: "18446744073709551615" } })).toEqual([]);
  });
});
