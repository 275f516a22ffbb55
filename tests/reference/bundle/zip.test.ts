import fc from "fast-check";
import JSZip from "jszip";
import { describe, expect, it } from "vitest";
import { readZip } from "@/builders/bundle/read-zip";
import { zipPieces } from "@/builders/bundle/zip";

/** The npm package jszip 3 as an outside writer: stored, fixed date, no folders, files of a UNIX system. */
async function writtenByJszip(files: ReadonlyMap<string, Uint8Array | string>): Promise<Buffer> {
  const zip = new JSZip();
  const entry = { createFolders: false, date: new Date(Date.UTC(1980, 0, 1)), unixPermissions: 0o100644 };
  for (const path of [...files.keys()].sort()) zip.file(path, Buffer.from(files.get(path) as string), entry);
  return zip.generateAsync({ type: "nodebuffer", compression: "STORE", platform: "UNIX" });
}

const writeZip = (files: ReadonlyMap<string, Uint8Array | string>) => Buffer.concat([...zipPieces(files)]);

// Paths begin with a letter: jszip keeps files in an object, and JavaScript moves keys like "1" to its front.
const paths = fc.stringMatching(/^[A-Z][A-Za-z0-9_-]{0,8}(\/[a-z0-9]{1,6}\.hex)?$/);
const contents = fc.oneof(fc.uint8Array({ maxLength: 300 }), fc.string({ maxLength: 60 }));
const bundles = fc.uniqueArray(fc.tuple(paths, contents), { maxLength: 9, selector: ([path]) => path });

describe("the zips that we write", () => {
  it("are byte by byte those of jszip", async () => {
    await fc.assert(
      fc.asyncProperty(bundles, async (entries) => {
        const files = new Map<string, Uint8Array | string>(entries);
        expect(writeZip(files).equals(await writtenByJszip(files))).toBe(true);
      }),
      { numRuns: 60 },
    );
  });

  it("come whole from jszip's reader and from our own, whatever the order they were given in", async () => {
    await fc.assert(
      fc.asyncProperty(bundles, async (entries) => {
        const zip = writeZip(new Map<string, Uint8Array | string>(entries));
        expect(writeZip(new Map<string, Uint8Array | string>([...entries].reverse()))).toEqual(zip);
        const theirs = await JSZip.loadAsync(zip, { checkCRC32: true });
        const ours = readZip(zip);
        expect(Object.keys(theirs.files).sort()).toEqual([...ours.keys()]);
        for (const [path, content] of entries) {
          expect(Buffer.from(ours.get(path) as Uint8Array)).toEqual(Buffer.from(content as string));
          expect(await theirs.file(path)?.async("nodebuffer")).toEqual(Buffer.from(content as string));
        }
      }),
      { numRuns: 30 },
    );
  });

  it("hold as many entries as a lot may have devices, and refuse more than a plain zip can tell", () => {
    const many = (count: number) => new Map(Array.from({ length: count }, (_, i) => [`f${i}`, "x"]));
    expect(readZip(writeZip(many(60_000))).size).toBe(60_000);
    expect(() => zipPieces(many(65_535))).toThrow(expect.objectContaining({ code: "bundle.too_many_files" }));
  });

  it.each(["../x", "/x", "a//b", "a/./b", "a b", "ä", ""])("refuse the path “%s” before any byte", (path) => {
    expect(() => zipPieces(new Map([[path, "1"]]))).toThrow(expect.objectContaining({ code: "bundle.bad_path" }));
  });
});
