import fc from "fast-check";
import { expect, it } from "vitest";
import { PieceCutter } from "@/builders/bundle/pieces";

it("cuts any stream into pieces of one length whose joined bytes are the stream's", () => {
  const parts = fc.array(fc.uint8Array({ maxLength: 40 }), { maxLength: 12 });
  fc.assert(
    fc.property(parts, fc.integer({ min: 1, max: 17 }), (given, size) => {
      const cutter = new PieceCutter(size);
      const full = given.flatMap((part) => cutter.add(part));
      const rest = cutter.rest();
      const pieces = rest ? [...full, rest] : full;
      expect(Buffer.concat(pieces)).toEqual(Buffer.concat(given));
      for (const piece of pieces.slice(0, -1)) expect(piece).toHaveLength(size);
      for (const piece of pieces) expect(piece.length).toBeGreaterThan(0);
    }),
  );
});
