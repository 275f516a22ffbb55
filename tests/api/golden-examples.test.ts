/**
 * The worked examples of the contract, made by an independent program (tests/fixtures/golden/README.md), taken through the
 * API from family to release, and what is downloaded then held against the example and against outside programs: objcopy
 * (binutils), srec_cat (srecord), unzip, sha256sum (coreutils) and openssl.
 */
import { createHash } from "node:crypto";
import { readdirSync, readFileSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { beforeAll, describe, expect, it } from "vitest";
import { sumsText } from "@/builders/bundle/sums";
import { VERIFY_COMMANDS } from "@/builders/bundle/verify-text";
import { openTestApi, type TestApi } from "../support/api";
import { inFolder, runTool } from "../support/programs";
import { firstGolden, type GoldenLot, secondGolden } from "../support/scenario/golden";
import { type ReleasedThroughApi, releaseThroughApi } from "../support/scenario/released-through-api";
import { failingCommands, unpacked } from "../support/unpacked-bundle";

const EXAMPLES = [
  { name: "first", golden: firstGolden(), images: 28, hexes: 4 },
  { name: "second", golden: secondGolden(), images: 14, hexes: 2 },
] as const;

let api: TestApi;
const released = new Map<string, ReleasedThroughApi>();

const sha256 = (data: string | Uint8Array) => createHash("sha256").update(data).digest("hex");
const packageOf = ({ lot }: GoldenLot) => (released.get(lot) as ReleasedThroughApi).package;
const digestsOf = (golden: GoldenLot): Record<string, string> =>
  JSON.parse(golden.read("images/sha256-of-bytes.json").toString("utf8"));
const memoryOf = (golden: GoldenLot) =>
  JSON.parse(golden.layout).memory as { bytes: number; baseAddress: number; fill: number };

async function download(golden: GoldenLot, headers: Record<string, string> = {}): Promise<Buffer> {
  const reply = await api.call("GET", `/packages/${packageOf(golden)}/bundle`, { as: "service", headers });
  expect(reply.status).toBeLessThan(300);
  return reply.body;
}

beforeAll(async () => {
  api = await openTestApi();
  for (const { golden } of EXAMPLES) released.set(golden.lot, await releaseThroughApi(api, golden));
});

describe.each(EXAMPLES)("the $name golden example through the API", ({ golden, images, hexes }) => {
  it("ends live as version 1.0.0 with every device", async () => {
    const { body } = await api.call("GET", `/packages/${packageOf(golden)}`, { as: "auditor" });
    expect(body).toMatchObject({ state: "live", version: "1.0.0", sequence: 1, lot: golden.lot });
    expect(body.counts.devices).toBe(images);
  });

  it("has every image with the SHA-256 of the example", async () => {
    const query = { limit: 1000 };
    const { items } = (await api.call("GET", `/packages/${packageOf(golden)}/images`, { as: "service", query })).body;
    const digests = items.map((item: { serial: string; sha256: string }) => [item.serial, item.sha256]);
    expect(Object.fromEntries(digests)).toEqual(digestsOf(golden));
    expect(items).toHaveLength(images);
  });

  it("answers the example's HEX files byte by byte", async () => {
    const folder = join(
      import.meta.dirname,
      "../fixtures/golden",
      golden === EXAMPLES[0].golden ? "." : "second",
      "images",
    );
    const files = readdirSync(folder).filter((name) => name.endsWith(".hex"));
    expect(files).toHaveLength(hexes);
    for (const file of files) {
      const path = `/packages/${packageOf(golden)}/images/${file.replace(/\.hex$/, "")}`;
      const { body } = await api.call("GET", path, { as: "service", headers: { accept: "text/x-intel-hex" } });
      expect(body).toBe(readFileSync(join(folder, file), "utf8"));
    }
  });

  it("has HEX files that objcopy and srec_cat read back to the example's bytes", async () => {
    const { bytes, baseAddress, fill } = memoryOf(golden);
    const end = baseAddress + bytes;
    const fillHex = `0x${fill.toString(16)}`;
    await unpacked(await download(golden), (folder) => {
      for (const [serial, digest] of Object.entries(digestsOf(golden))) {
        const hex = `images/${serial}.hex`;
        const objcopy = ["-I", "ihex", "-O", "binary", "--gap-fill", fillHex, `--pad-to=${end}`, hex, "o.bin"];
        runTool("objcopy", objcopy, undefined, folder);
        expect(sha256(readFileSync(join(folder, "o.bin"))), `objcopy ${serial}`).toBe(digest);
        const filled = [
          hex,
          "-intel",
          "-fill",
          fillHex,
          String(baseAddress),
          String(end),
          "-offset",
          `-${baseAddress}`,
        ];
        runTool("srec_cat", [...filled, "-o", "s.bin", "-binary"], undefined, folder);
        expect(sha256(readFileSync(join(folder, "s.bin"))), `srec_cat ${serial}`).toBe(digest);
      }
    });
  });

  it("gives the same bundle at every download, and the same from pieces", async () => {
    const whole = await download(golden);
    expect((await download(golden)).equals(whole)).toBe(true);
    const pieces: Buffer[] = [];
    for (let from = 0; from < whole.length; from += 5_000) {
      pieces.push(await download(golden, { range: `bytes=${from}-${from + 4_999}` }));
    }
    expect(Buffer.concat(pieces).equals(whole)).toBe(true);
  });

  it("is verified by the literal commands of its VERIFY.txt in bash", async () => {
    await unpacked(await download(golden), (folder) => expect(failingCommands(folder, "/bin/bash")).toEqual([]));
  });

  it("is signed with a key that the installation lists", async () => {
    const { items } = (await api.call("GET", "/signing-keys")).body;
    await unpacked(await download(golden), (folder) => {
      const der = runTool(
        "openssl",
        ["pkey", "-pubin", "-in", "signing-key.pem", "-outform", "DER"],
        undefined,
        folder,
      );
      const keyId = sha256(der).slice(0, 16);
      expect(items.map((key: { keyId: string }) => key.keyId)).toContain(keyId);
      expect(JSON.parse(readFileSync(join(folder, "release.json"), "utf8"))).toMatchObject({ keyId, lot: golden.lot });
    });
  });

  it("is refused when an image, SHA256SUMS and manifest.json are changed together", async () => {
    await unpacked(await download(golden), (folder) => {
      const [first = "", other = ""] = Object.keys(digestsOf(golden)).map((serial) => `images/${serial}.hex`);
      const before = readFileSync(join(folder, first));
      const changed = readFileSync(join(folder, other));
      writeFileSync(join(folder, first), changed);
      const manifest = readFileSync(join(folder, "manifest.json"), "utf8").replace(sha256(before), sha256(changed));
      writeFileSync(join(folder, "manifest.json"), manifest);
      const listed = [
        "images.jsonl",
        "manifest.json",
        ...readdirSync(join(folder, "images")).map((name) => `images/${name}`),
      ];
      const sums = sumsText(new Map(listed.map((path) => [path, readFileSync(join(folder, path))])));
      writeFileSync(join(folder, "SHA256SUMS"), sums);
      expect(failingCommands(folder, "/bin/bash")).toEqual([VERIFY_COMMANDS.sums]);
    });
  });

  it("names its derivation by digest in the manifest, whose SHA-256 is the package digest", async () => {
    const reply = await api.call("GET", `/packages/${packageOf(golden)}/manifest`, { as: "auditor" });
    const { body: pkg } = await api.call("GET", `/packages/${packageOf(golden)}`, { as: "auditor" });
    const { body: derivation } = await api.call("GET", `/derivations/${released.get(golden.lot)?.derivation}`, {
      as: "auditor",
    });
    expect(reply.headers.get("etag")).toBe(`"${pkg.digest}"`);
    expect(reply.body.derivations).toMatchObject([
      { id: derivation.id, sha256: derivation.sha256, method: "pooled-gain" },
    ]);
    expect(reply.body.provenRange).toEqual(derivation.provenRange);
    await inFolder(async (folder) => {
      await unpacked(await download(golden), (inside) =>
        writeFileSync(join(folder, "m"), readFileSync(join(inside, "manifest.json"))),
      );
      expect(runTool("sha256sum", ["m"], undefined, folder).toString()).toBe(`${pkg.digest}  m\n`);
    });
  });
});
