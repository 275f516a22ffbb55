import fc from "fast-check";
import { expect, it } from "vitest";
import { cutPieces } from "@/builders/bundle/pieces";
import { writeZip, zipPieces } from "@/builders/bundle/zip";

async function* streamOf(parts: readonly Uint8Array[]) {
  yield* parts;
}

async function collect(stream: AsyncIterable<Uint8Array>): Promise<Uint8Array[]> {
  const pieces: Uint8Array[] = [];
  for await (const piece of stream) pieces.push(piece);
  return pieces;
}

it("cuts any stream into pieces of one length whose joined bytes are the stream's", async () => {
  const parts = fc.array(fc.uint8Array({ maxLength: 40 }), { maxLength: 12 });
  await fc.assert(
    fc.asyncProperty(parts, fc.integer({ min: 1, max: 17 }), async (given, size) => {
      const pieces = await collect(cutPieces(streamOf(given), size));
      expect(Buffer.concat(pieces)).toEqual(Buffer.concat(given));
      for (const piece of pieces.slice(0, -1)) expect(piece).toHaveLength(size);
      for (const piece of pieces) expect(piece.length).toBeGreaterThan(0);
    }),
  );
});

it("hands out a zip of several megabytes to a slow reader whole and unchanged", async () => {
  const files = new Map(Array.from({ length: 600 }, (_, i) => [`f${String(i).padStart(4, "0")}`, "x".repeat(8_000)]));
  const slow: Uint8Array[] = [];
  for await (const piece of zipPieces(files)) {
    if (slow.length % 50 === 0) await new Promise((resolve) => setTimeout(resolve, 1));
    slow.push(piece);
  }
  expect(Buffer.concat(slow).equals(await writeZip(files))).toBe(true);
});

it("refuses paths that leave the folder before any byte", () => {
  expect(() => zipPieces(new Map([["../x", "1"]]))).toThrow(expect.objectContaining({ code: "bundle.bad_path" }));
});
