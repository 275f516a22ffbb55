import { describe, expect, it } from "vitest";
import { compileLayout } from "@/builders/codec/compile-layout";
import { encodeImage } from "@/builders/codec/image";
import { differencesOf } from "@/lib/services/trace/dump-differences";
import type { LayoutField } from "@/schemas/documents/layout";
import { oneFieldLayout, plainSources } from "../builders/layouts";

const bits = [
  { name: "order", from: 0, width: 2, enum: { none: 0, linear: 1, square: 2 }, value: { const: "square" } },
  { name: "level", from: 2, width: 7, value: { const: 20 } },
  { name: "size", from: 10, width: 6, unit: "kg", value: { const: 50 } },
];
const layout = compileLayout(oneFieldLayout({ name: "flags", type: "u16", value: { bits } as LayoutField["value"] }));
// As the database gives it.
const image = Buffer.from(encodeImage(layout, plainSources()));

/** Names and values of what differs once some bits of the memory are turned. */
function turned(...bytes: [at: number, mask: number][]) {
  const memory = Uint8Array.from(image);
  for (const [at, mask] of bytes) memory[at] = (memory[at] as number) ^ mask;
  return differencesOf(layout, image, memory).map((one) => [one.at, one.field, one.expectedValue, one.actualValue]);
}

describe("differencesOf", () => {
  it("names the part whose bits differ, not the first one in the byte", () => {
    expect(turned([1, 0b100])).toEqual([[1, "flags.size", 50, 51]]);
    expect(turned([0, 0b100])).toEqual([[0, "flags.level", 20, 21]]);
    expect(turned([0, 0b1])).toEqual([[0, "flags.order", "square", null]]);
  });

  it("tells every part that a byte's differing bits belong to, and each byte of a part", () => {
    expect(turned([0, 0b111], [1, 0b1])).toEqual([
      [0, "flags.order", "square", "linear"],
      [0, "flags.level", 20, 85],
      [1, "flags.level", 20, 85],
    ]);
    expect(turned([0, 0b11])).toEqual([[0, "flags.order", "square", "linear"]]);
  });

  it("gives no value where the bits belong to no part, and no field outside all", () => {
    expect(turned([1, 0b10])).toEqual([[1, "flags", null, null]]);
    expect(turned([10, 1])).toEqual([[10, null, null, null]]);
  });

  it("tells a checksum's bytes", () => {
    expect(turned([30, 1])[0]?.slice(0, 2)).toEqual([30, "sum"]);
  });
});
