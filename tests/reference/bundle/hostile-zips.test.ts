/** Zips that other programs take and a station must not: made with Python's zipfile, or from ours by a change of bytes. */
import { mkdirSync, readFileSync, symlinkSync, writeFileSync } from "node:fs";
import { dirname, join } from "node:path";
import { describe, expect, it } from "vitest";
import { readZip } from "@/builders/bundle/read-zip";
import { verifyBundle, verifyBundleFiles } from "@/builders/bundle/verify-bundle";
import { zipPieces } from "@/builders/bundle/zip";
import verify from "@/lib/commands/verify";
import { setEnv } from "@/lib/env";
import { releasedFiles } from "@/tests/reference/bundle/bundle-files";
import { examplePackage, exampleRelease } from "@/tests/reference/bundle/example";
import { inFolder, PYTHON, runTool } from "@/tests/support/programs";

const { content, manifest } = examplePackage();
const files = releasedFiles(content, exampleRelease(content, manifest));
const good = Buffer.concat([...zipPieces(files)]);

const PLAIN = "i.date_time = (1980, 1, 1, 0, 0, 0); i.create_system = 3; i.external_attr = 0o100644 << 16";
/** What Python does with `z`, a zip that is open for writing. */
const MADE_BY_PYTHON: [name: string, script: string, reason: RegExp][] = [
  [
    "an entry twice",
    `${"for _ in range(2):\n  "}i = zipfile.ZipInfo('a'); ${PLAIN}; z.writestr(i, b'1')`,
    /not in order, or one twice/,
  ],
  ["a path that leaves the folder", `i = zipfile.ZipInfo('../a'); ${PLAIN}; z.writestr(i, b'1')`, /path is not plain/],
  ["an absolute path", `i = zipfile.ZipInfo('/etc/a'); ${PLAIN}; z.writestr(i, b'1')`, /path is not plain/],
  [
    "a backslash",
    `i = zipfile.ZipInfo('a'); ${PLAIN}; i.filename = 'a\\\\b'; z.writestr(i, b'1')`,
    /path is not plain/,
  ],
  ["a folder", `i = zipfile.ZipInfo('a/'); ${PLAIN}; z.writestr(i, b'')`, /path is not plain/],
  [
    "a link",
    `i = zipfile.ZipInfo('a'); ${PLAIN}; i.external_attr = 0o120777 << 16; z.writestr(i, b'/etc/passwd')`,
    /no plain file/,
  ],
  [
    "a deflated entry",
    `i = zipfile.ZipInfo('a'); ${PLAIN}; i.compress_type = zipfile.ZIP_DEFLATED; z.writestr(i, b'0' * 1000000)`,
    /not stored/,
  ],
  [
    "another date",
    `i = zipfile.ZipInfo('a', (2026, 1, 1, 0, 0, 0)); i.external_attr = 0o100644 << 16; z.writestr(i, b'1')`,
    /another date/,
  ],
  [
    "a comment of the zip",
    `i = zipfile.ZipInfo('a'); ${PLAIN}; z.writestr(i, b'1'); z.comment = b'hello'`,
    /no end record|comment/,
  ],
  [
    "a comment of an entry",
    `i = zipfile.ZipInfo('a'); ${PLAIN}; i.comment = b'hello'; z.writestr(i, b'1')`,
    /extra fields or comments/,
  ],
  [
    "an extra field",
    `i = zipfile.ZipInfo('a'); ${PLAIN}; i.extra = bytes([1, 2, 0, 0]); z.writestr(i, b'1')`,
    /extra fields/,
  ],
  [
    "Zip64 records",
    `i = zipfile.ZipInfo('a'); ${PLAIN}\nwith z.open(i, 'w', force_zip64=True) as f: f.write(b'1')`,
    /extra fields|flags|two sizes|runs into/,
  ],
  [
    "entries out of order",
    `${"for n in 'ba':\n  "}i = zipfile.ZipInfo(n); ${PLAIN}; z.writestr(i, b'1')`,
    /not in order/,
  ],
];

const at = (mark: string, from = 0) => good.indexOf(mark, from, "latin1");
const directory = good.readUInt32LE(good.length - 6);
const changed = (change: (zip: Buffer) => void) => {
  const zip = Buffer.from(good);
  change(zip);
  return zip;
};
const MADE_FROM_OURS: [name: string, zip: Buffer, reason: RegExp][] = [
  ["bytes behind the end", Buffer.concat([good, Buffer.from("x")]), /no end record/],
  ["bytes in front", Buffer.concat([Buffer.from("#!/bin/sh\n"), good]), /between directory and end record/],
  ["a zip behind a zip", Buffer.concat([good, good]), /between its entries|between directory|broken directory/],
  [
    "another name in the directory",
    changed((zip) => zip.write("SHA256SUMZ", at("SHA256SUMS", directory))),
    /differently/,
  ],
  ["another size in the directory", changed((zip) => zip.writeUInt32LE(1, directory + 24)), /describes differently/],
  ["another check in the directory", changed((zip) => zip.writeUInt32LE(1, directory + 16)), /describes differently/],
  ["an entry that points elsewhere", changed((zip) => zip.writeUInt32LE(7, directory + 42)), /between its entries/],
  [
    "a count that is too small",
    changed((zip) => {
      zip.writeUInt16LE(1, good.length - 14);
      zip.writeUInt16LE(1, good.length - 12);
    }),
    /belong to no entry/,
  ],
  ["a damaged content", changed((zip) => zip.write("X", 45)), /damaged entry: SHA256SUMS/],
  [
    "sizes after the content",
    changed((zip) => {
      zip.writeUInt16LE(8, 6);
      zip.writeUInt16LE(8, directory + 8);
    }),
    /flags/,
  ],
  ["half of it", good.subarray(0, good.length / 2), /no end record/],
  ["nothing", Buffer.alloc(0), /no zip.* no end record/],
  ["a file of another kind", Buffer.from("%PDF-1.7 and more than thirty bytes of it"), /This is no zip/],
];

describe("verify refuses", () => {
  it.each(MADE_BY_PYTHON)("%s", async (_name, script, reason) => {
    await inFolder((folder) => {
      const path = join(folder, "hostile.zip");
      runTool(PYTHON, [
        "-W",
        "ignore",
        "-c",
        `import zipfile\nz = zipfile.ZipFile(${JSON.stringify(path)}, 'w')\n${script}\nz.close()`,
      ]);
      expect(() => readZip(readFileSync(path))).toThrow(
        expect.objectContaining({ message: expect.stringMatching(reason) }),
      );
      expect(verifyBundle(readFileSync(path)).ok).toBe(false);
    });
  });

  it.each(MADE_FROM_OURS)("%s", (_name, zip, reason) => {
    const { ok, steps } = verifyBundle(zip);
    expect(ok).toBe(false);
    expect(steps.find((step) => !step.ok)?.message).toMatch(reason);
  });

  it("a link in a bundle that was unpacked", async () => {
    await inFolder(async (folder) => {
      for (const [path, text] of files) {
        mkdirSync(dirname(join(folder, path)), { recursive: true });
        writeFileSync(join(folder, path), text);
      }
      symlinkSync("/etc/hostname", join(folder, "images/extra.hex"));
      setEnv({ INIT_CWD: folder });
      await expect(verify([folder])).rejects.toMatchObject({ code: "bundle.not_plain" });
    });
  });

  it("nothing of a bundle that is ours", () => {
    expect(verifyBundle(good)).toMatchObject({ ok: true });
  });
});

describe("verify tells", () => {
  const stepsOf = (more: Record<string, string>) =>
    Object.fromEntries(
      verifyBundleFiles(
        new Map([...unpackedFiles, ...Object.entries(more).map(([path, text]) => [path, Buffer.from(text)] as const)]),
      ).steps.map((step) => [step.name, step]),
    );
  const unpackedFiles = readZip(good);

  it("that nothing holds a VERIFY.txt of other words", () => {
    expect(stepsOf({}).files?.message).not.toContain("VERIFY.txt");
    const { ok, message } = stepsOf({ "VERIFY.txt": "run: curl somewhere | sh" }).files ?? {};
    expect([ok, message]).toEqual([true, expect.stringContaining("run no command of it unread")]);
  });

  it("one file from several", () => {
    expect(stepsOf({ a: "" }).files?.message).toBe("1 file is not listed: a");
    expect(stepsOf({ a: "", b: "" }).files?.message).toBe("2 files are not listed, a among them");
  });

  it("of a preview that nothing is signed, not that files are missing", () => {
    const preview = stepsOf({ "NOT-RELEASED.txt": "" });
    for (const name of ["manifest", "list", "signature", "key"]) {
      expect(preview[name]).toMatchObject({ ok: false, message: "This is a preview: nothing in it is signed" });
    }
  });
});
