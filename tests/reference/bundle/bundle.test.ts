import { execFileSync } from "node:child_process";
import { mkdirSync, readdirSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { dirname, join } from "node:path";
import { describe, expect, it } from "vitest";
import { sha256Hex } from "@/builders/bundle/sha256";
import { sumsText } from "@/builders/bundle/sums";
import { VERIFY_COMMANDS, verifyText } from "@/builders/bundle/verify-text";
import { zipPieces } from "@/builders/bundle/zip";
import { previewFiles, releasedFiles } from "@/tests/reference/bundle/bundle-files";
import { examplePackage, exampleRelease } from "@/tests/reference/bundle/example";
import { inFolder, PYTHON, runTool } from "@/tests/support/programs";
import { commandsOf, failingCommands, unpacked } from "@/tests/support/unpacked-bundle";

const { content, manifest } = examplePackage();
const files = releasedFiles(content, exampleRelease(content, manifest));
const writeZip = (files: ReadonlyMap<string, Uint8Array | string>) => Buffer.concat([...zipPieces(files)]);
const zip = writeZip(files);
const FIRST = "images/MW20-2609-00001.hex";

describe("a bundle as outside programs read it", () => {
  it("is whole for unzip", async () => {
    await inFolder((folder) => {
      writeFileSync(join(folder, "bundle.zip"), zip);
      const said = runTool("unzip", ["-t", "bundle.zip"], undefined, folder).toString();
      expect(said).toContain("No errors detected");
    });
  });

  it("is stored, sorted, dated 1980-01-01 and without extra fields for zipinfo", async () => {
    await inFolder((folder) => {
      writeFileSync(join(folder, "bundle.zip"), zip);
      const rows = runTool("zipinfo", ["-T", "bundle.zip"], undefined, folder).toString().split("\n").slice(2, -2);
      expect(rows).toHaveLength(files.size);
      for (const row of rows) expect(row).toMatch(/^-rw-r--r-- .* [bt]- .* ?stor 19800101\.000000 /);
      const names = rows.map((row) => row.split(" ").at(-1) as string);
      expect(names).toEqual([...names].sort());
      const detail = runTool("zipinfo", ["-v", "bundle.zip"], undefined, folder).toString();
      const count = (pattern: RegExp) => detail.match(pattern)?.length;
      expect(count(/length of extra field: +0 bytes/g)).toBe(files.size);
      expect(count(/compression method: +none \(stored\)/g)).toBe(files.size);
    });
  });

  it("reads alike for Python's zipfile", async () => {
    await inFolder((folder) => {
      writeFileSync(join(folder, "bundle.zip"), zip);
      const script = `
import hashlib, json, zipfile
with zipfile.ZipFile("bundle.zip") as z:
    print(json.dumps({n: hashlib.sha256(z.read(n)).hexdigest() for n in z.namelist()}))`;
      const read = JSON.parse(runTool(PYTHON, ["-c", script], undefined, folder).toString()) as object;
      expect(read).toEqual(Object.fromEntries([...files].map(([path, data]) => [path, sha256Hex(data)])));
    });
  });

  it("has the bytes of a published one-file zip but for the version of its maker", async () => {
    // Source: stored zip of one file, checked with unzip, zipinfo and Python (tests/fixtures/published/vectors.json).
    const vectors = JSON.parse(
      readFileSync(join(import.meta.dirname, "../../fixtures/published/vectors.json"), "utf8"),
    ) as {
      "stored_zip_one_file_a.txt_abc": { hex: string };
    };
    const expected = Buffer.from(vectors["stored_zip_one_file_a.txt_abc"].hex, "hex");
    const made = writeZip(new Map([["a.txt", "abc"]]));
    const madeByVersion = expected.indexOf("PK\x01\x02") + 4;
    expected[madeByVersion] = made[madeByVersion] as number;
    expect(made.toString("hex")).toBe(expected.toString("hex"));
  });

  it("is the same bytes in another process and time zone", async () => {
    const root = join(import.meta.dirname, "../../..");
    const script = `import { zipPieces } from "@/builders/bundle/zip";
      const zip = Buffer.concat([...zipPieces(new Map([["b/c.txt", "1"], ["a.txt", "abc"]]))]);
      process.stdout.write(zip.toString("hex"));`;
    await inFolder(async (folder) => {
      writeFileSync(join(folder, "make.mts"), script);
      const run = (zone: string) =>
        execFileSync(process.execPath, ["--import", "tsx", join(folder, "make.mts")], {
          cwd: root,
          env: { ...process.env, TZ: zone, TSX_TSCONFIG_PATH: join(root, "tsconfig.json") },
        }).toString();
      const files = new Map([
        ["a.txt", "abc"],
        ["b/c.txt", "1"],
      ]);
      const here = writeZip(files).toString("hex");
      expect(run("Pacific/Kiritimati")).toBe(here);
      expect(run("America/Adak")).toBe(here);
    });
  });
});

describe("VERIFY.txt run by sh", () => {
  it("shows the very commands that are tested", () => {
    const shown = commandsOf(verifyText());
    for (const command of Object.values(VERIFY_COMMANDS)) expect(shown).toContain(command);
    expect(shown).toHaveLength(Object.keys(VERIFY_COMMANDS).length + 1);
  });

  it("passes on an unpacked bundle", async () => {
    await unpacked(zip, (folder) => expect(failingCommands(folder)).toEqual([]));
  });

  it("prints the key id", async () => {
    await unpacked(zip, (folder) => {
      const [show = ""] = commandsOf(verifyText());
      const said = execFileSync("/bin/sh", ["-c", show], { cwd: folder }).toString().trim();
      expect(readFileSync(join(folder, "release.json"), "utf8")).toContain(`"keyId":"${said}"`);
    });
  });

  it("refuses an image that was changed", async () => {
    await unpacked(zip, (folder) => {
      writeFileSync(join(folder, FIRST), readFileSync(join(folder, "images/MW20-2609-00002.hex")));
      expect(failingCommands(folder)).toEqual([VERIFY_COMMANDS.files]);
    });
  });

  it("refuses an image, SHA256SUMS and manifest.json changed together", async () => {
    await unpacked(zip, (folder) => {
      const hex = readFileSync(join(folder, "images/MW20-2609-00002.hex"), "utf8");
      const old = sha256Hex(readFileSync(join(folder, FIRST)));
      writeFileSync(join(folder, FIRST), hex);
      const changed = readFileSync(join(folder, "manifest.json"), "utf8").replace(old, sha256Hex(hex));
      writeFileSync(join(folder, "manifest.json"), changed);
      const listed = [
        "images.jsonl",
        "manifest.json",
        ...readdirSync(join(folder, "images")).map((name) => `images/${name}`),
      ];
      writeFileSync(
        join(folder, "SHA256SUMS"),
        sumsText(new Map(listed.map((path) => [path, readFileSync(join(folder, path))]))),
      );
      expect(failingCommands(folder)).toEqual([VERIFY_COMMANDS.sums]);
    });
  });

  it("refuses a release.json that was changed along with them", async () => {
    await unpacked(zip, (folder) => {
      const text = readFileSync(join(folder, "release.json"), "utf8").replace('"sequence":1', '"sequence":9');
      writeFileSync(join(folder, "release.json"), text);
      expect(failingCommands(folder)).toEqual([VERIFY_COMMANDS.signature]);
    });
  });

  it.each(["notes.txt", "images/MW20-2609-99999.hex", "SHA256SUMSx"])(
    "refuses the file %s that is not listed",
    async (path) => {
      await unpacked(zip, (folder) => {
        mkdirSync(dirname(join(folder, path)), { recursive: true });
        writeFileSync(join(folder, path), "x");
        expect(failingCommands(folder)).toEqual([VERIFY_COMMANDS.unlisted]);
      });
    },
  );

  it("refuses a bundle that lacks an image", async () => {
    await unpacked(zip, (folder) => {
      rmSync(join(folder, FIRST));
      expect(failingCommands(folder)).toEqual([VERIFY_COMMANDS.files, VERIFY_COMMANDS.unlisted]);
    });
  });

  it("of a preview passes and says that nothing is released", async () => {
    const preview = writeZip(previewFiles(content, { lot: "MW20-2609", version: "1.0.0" }));
    await inFolder((folder) => {
      writeFileSync(join(folder, "p.zip"), preview);
      runTool("unzip", ["-q", "p.zip", "-d", "p"], undefined, folder);
      expect(readFileSync(join(folder, "p/NOT-RELEASED.txt"), "utf8")).toContain("is not released");
      expect(readdirSync(join(folder, "p"))).not.toContain("release.json");
      expect(failingCommands(join(folder, "p"))).toEqual([]);
    });
  });
});
