import { crc32 as zlibCrc32 } from "node:zlib";
import fc from "fast-check";
import { expect, it } from "vitest";
import { crc32, plainCrc32 } from "@/builders/bundle/crc32";

it("goes on from piece to piece, with zlib's CRC-32 and with our own, as zlib does over the whole", () => {
  fc.assert(
    fc.property(fc.array(fc.uint8Array({ maxLength: 40 }), { maxLength: 6 }), (pieces) => {
      const whole = zlibCrc32(Buffer.concat(pieces));
      for (const sum of [crc32, plainCrc32]) {
        expect(pieces.reduce((before, piece) => sum(piece, before), 0)).toBe(whole);
      }
    }),
  );
});
