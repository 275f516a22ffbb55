import { readFileSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { describe, expect, it } from "vitest";
import { readIndependently } from "@/builders/bundle/independent-read";
import { type CompiledLayout, compileLayout } from "@/builders/codec/compile-layout";
import { assembleImage, writeImageHex, writeImageSRecords } from "@/builders/codec/files/hex-image";
import { readIntelHex } from "@/builders/codec/files/intel-hex-read";
import { writeIntelHex } from "@/builders/codec/files/intel-hex-write";
import { readSRecords } from "@/builders/codec/files/s-record-read";
import { writeSRecords } from "@/builders/codec/files/s-record-write";
import { imageDigestBytes } from "@/builders/codec/image";
import type { ByteRange, MemorySegment } from "@/schemas/documents/layout";
import { inFolder, PYTHON, runTool } from "@/tests/support/programs";
import { smallLayout } from "@/tests/unit/builders/layouts";

const image = Uint8Array.from({ length: 200 }, (_, i) => (i * 73 + 5) & 0xff);
const BASES = [
  { name: "0", base: 0, type: "S1" },
  { name: "above 64 K", base: 0x12340, type: "S2" },
  { name: "across a 64 K edge", base: 0xffe8, type: "S2" },
  { name: "0x08000000", base: 0x0800_0000, type: "S3" },
  { name: "across an edge at 0x0801FFFE", base: 0x0801_fffe, type: "S3" },
  { name: "up to FFFFFFFF", base: 2 ** 32 - 200, type: "S3" },
];

/** Address and bytes of what python3-intelhex reads. */
const READ_SCRIPT = `
import json, sys
from intelhex import IntelHex
read = IntelHex(sys.argv[1])
print(json.dumps([[start, list(read.tobinarray(start, end - 1))] for start, end in read.segments()]))`;

const segmentsByIntelhex = (folder: string, name: string) =>
  (JSON.parse(runTool(PYTHON, ["-c", READ_SCRIPT, name], undefined, folder).toString()) as [number, number[]][]).map(
    ([address, bytes]) => ({ address, bytes: Uint8Array.from(bytes) }),
  );

describe("S-records as outside programs read and write them", () => {
  describe.each(BASES)("at $name", ({ base, type }) => {
    const text = writeSRecords(image, base, []);

    it("have the shortest address that reaches the end", () => {
      const types = new Set(text.split("\n").map((line) => line.slice(0, 2)));
      expect(types.has(type)).toBe(true);
      expect([...types].filter((one) => /^S[123]$/.test(one))).toEqual([type]);
    });

    it("objcopy (binutils) gives the bytes back", async () => {
      await inFolder((folder) => {
        writeFileSync(join(folder, "a.srec"), text);
        runTool("objcopy", ["-I", "srec", "-O", "binary", "a.srec", "a.bin"], undefined, folder);
        expect(new Uint8Array(readFileSync(join(folder, "a.bin")))).toEqual(image);
      });
    });

    it("srec_cat (srecord) gives the bytes at their addresses, without a warning", async () => {
      await inFolder((folder) => {
        writeFileSync(join(folder, "a.srec"), text);
        runTool("srec_cat", ["a.srec", "-motorola", "-o", "a.hex", "-intel"], undefined, folder);
        expect(readIntelHex(readFileSync(join(folder, "a.hex"), "latin1")).segments).toEqual([
          { address: base, bytes: image },
        ]);
      });
    });

    it("we read what objcopy and srec_cat write", async () => {
      await inFolder((folder) => {
        writeFileSync(join(folder, "a.bin"), image);
        const moved = `--change-addresses=${base}`;
        runTool("objcopy", ["-I", "binary", "-O", "srec", moved, "a.bin", "o.srec"], undefined, folder);
        runTool("srec_cat", ["a.bin", "-binary", "-offset", `${base}`, "-o", "s.srec", "-motorola"], undefined, folder);
        for (const name of ["o.srec", "s.srec"]) {
          const { segments, gaps } = readSRecords(readFileSync(join(folder, name), "latin1"));
          expect({ segments, gaps }).toEqual({ segments: [{ address: base, bytes: image }], gaps: [] });
        }
      });
    });

    it("our own reader gives the bytes back", () => {
      expect(readSRecords(text)).toEqual({ segments: [{ address: base, bytes: image }], gaps: [], start: null });
    });
  });

  it("count more records than fit into 16 bits", async () => {
    const large = new Uint8Array(0x10_0010).fill(0x5a);
    const text = writeSRecords(large, 0, []);
    expect(text).toContain("\nS604010001F9\n");
    expect(readSRecords(text).segments[0]?.bytes).toHaveLength(large.length);
  });
});

describe("Intel HEX that others write", () => {
  it.each([
    { name: "objcopy below 1 MiB, with records 02 and 03", base: 0x21_000, records: ["02", "03"] },
    { name: "objcopy above, with records 04 and 05", base: 0x0801_fffe, records: ["04", "05"] },
  ])("is read: $name", async ({ base, records }) => {
    await inFolder((folder) => {
      writeFileSync(join(folder, "a.bin"), image);
      const moved = `--change-addresses=${base}`;
      runTool("objcopy", ["-I", "binary", "-O", "ihex", moved, "a.bin", "a.hex"], undefined, folder);
      const text = readFileSync(join(folder, "a.hex"), "latin1");
      expect(text).toContain("\r\n");
      const types = new Set(text.split("\r\n").map((line) => line.slice(7, 9)));
      for (const type of records) expect(types).toContain(type);
      const { segments, start } = readIntelHex(text);
      expect(segments).toEqual([{ address: base, bytes: image }]);
      // CS:IP as one number of 32 bits under type 03, the address itself under type 05.
      expect(start).toBe(records.includes("05") ? base : 0x2000_1000);
    });
  });

  it("is read: srec_cat with 32 bytes a line, one of them across the edge", async () => {
    await inFolder((folder) => {
      writeFileSync(join(folder, "a.bin"), image);
      const args = ["a.bin", "-binary", "-offset", `${0x0801_fff0}`, "-o", "a.hex", "-intel"];
      runTool("srec_cat", args, undefined, folder);
      const text = readFileSync(join(folder, "a.hex"), "latin1");
      expect(text).toMatch(/^:20FFF000/m);
      expect(readIntelHex(text).segments).toEqual([{ address: 0x0801_fff0, bytes: image }]);
    });
  });

  it.each(BASES)("is read: python3-intelhex at $name", ({ base }) => {
    const script = `
import io, sys
from intelhex import IntelHex
made = IntelHex()
made.frombytes(sys.stdin.buffer.read(), offset=${base})
out = io.StringIO()
made.write_hex_file(out)
sys.stdout.write(out.getvalue())`;
    const text = runTool(PYTHON, ["-c", script], image).toString("latin1");
    expect(readIntelHex(text)).toEqual({ segments: [{ address: base, bytes: image }], gaps: [], start: null });
  });

  it("is equal to ours byte for byte where python3-intelhex starts at a multiple of 16", () => {
    const script = `
import io, sys
from intelhex import IntelHex
made = IntelHex()
made.frombytes(sys.stdin.buffer.read(), offset=0x0801FF80)
out = io.StringIO()
made.write_hex_file(out)
sys.stdout.write(out.getvalue())`;
    expect(runTool(PYTHON, ["-c", script], image).toString()).toBe(writeIntelHex(image, 0x0801_ff80, []));
  });
});

/** Layouts whose memory has kept gaps and segments, and bytes to lie in them. */
function sparse(baseAddress: number, kept: ByteRange[], segments: MemorySegment[]): CompiledLayout {
  const memory = { ...smallLayout().memory, baseAddress, segments };
  return compileLayout(
    smallLayout({ memory, kept, checksums: [{ name: "sum", at: 62, algorithm: "CRC-16/MODBUS", over: [0, 41] }] }),
  );
}

describe("kept gaps and segments", () => {
  const bytes = image.subarray(0, 64);

  it.each([
    [
      "a kept gap",
      sparse(0, [[44, 47]], []),
      [
        [0, 0, 44],
        [48, 48, 64],
      ],
    ],
    [
      "a kept end",
      sparse(0xffe8, [[44, 61]], []),
      [
        [0xffe8, 0, 44],
        [0x1_0026, 62, 64],
      ],
    ],
    [
      "two segments",
      sparse(0x100, [], [{ at: 44, baseAddress: 0x0800_0000 }]),
      [
        [0x100, 0, 44],
        [0x0800_0000, 44, 64],
      ],
    ],
    [
      "segments in falling order",
      sparse(0x0801_0000, [], [{ at: 44, baseAddress: 0x20 }]),
      [
        [0x20, 44, 64],
        [0x0801_0000, 0, 44],
      ],
    ],
    [
      "segments that touch, one with a kept gap",
      sparse(0xffd4, [[50, 51]], [{ at: 44, baseAddress: 0x1_0000 }]),
      [
        [0xffd4, 0, 50],
        [0x1_0008, 52, 64],
      ],
    ],
  ] as const)("lie where they should for every reader: %s", async (_, layout, expected) => {
    const told = expected.map(([address, from, end]) => ({ address, bytes: bytes.slice(from, end) }));
    const digested = imageDigestBytes(layout, bytes);
    const hex = writeImageHex(layout, bytes);
    expect(readIntelHex(hex).segments).toEqual(told);
    expect(readSRecords(writeImageSRecords(layout, bytes)).segments).toEqual(told);
    expect(readIndependently(hex, layout)).toEqual(digested);
    await inFolder((folder) => {
      writeFileSync(join(folder, "a.hex"), hex);
      writeFileSync(join(folder, "a.srec"), writeImageSRecords(layout, bytes));
      expect(segmentsByIntelhex(folder, "a.hex")).toEqual(told);
      runTool("objcopy", ["-I", "ihex", "-O", "srec", "a.hex", "o.srec"], undefined, folder);
      runTool("srec_cat", ["a.hex", "-intel", "-o", "s.srec", "-motorola"], undefined, folder);
      runTool("objcopy", ["-I", "srec", "-O", "ihex", "a.srec", "o.hex"], undefined, folder);
      runTool("srec_cat", ["a.srec", "-motorola", "-o", "s.hex", "-intel"], undefined, folder);
      for (const name of ["o.srec", "s.srec", "o.hex", "s.hex"]) {
        const text = readFileSync(join(folder, name), "latin1");
        const { segments } = name.endsWith("srec") ? readSRecords(text) : readIntelHex(text);
        expect({ name, segments }).toEqual({ name, segments: told });
        expect(assembleImage(layout, segments)).toEqual({ bytes: digested, missing: [], outside: [] });
      }
    });
  });

  it("tell what a file has beside the memory and what it lacks", () => {
    const layout = sparse(0x100, [], [{ at: 44, baseAddress: 0x200 }]);
    const found = assembleImage(layout, [{ address: 0xfe, bytes: new Uint8Array(0x110) }]);
    expect(found.missing).toEqual([[58, 63]]);
    expect(found.outside).toEqual([
      { address: 0xfe, length: 2 },
      { address: 0x12c, length: 0xd4 },
    ]);
  });
});

describe("malformed S-records", () => {
  const [head, data, count, end] = ["S0030000FC", "S107000001020304EE", "S5030001FB", "S9030000FC"];
  const file = (...lines: string[]) => `${lines.join("\n")}\n`;

  it.each([
    ["a wrong checksum", file(head, "S107000001020304EF", end), "srec.bad_checksum", 2],
    ["no end and no count", file(head, data), "srec.no_end", 2],
    ["an empty file", "", "srec.no_end", 0],
    ["a blank line inside", file(head, "", data, end), "srec.not_a_record", 2],
    ["text before", file("hello", data, end), "srec.not_a_record", 1],
    ["data after the end", file(data, end, data), "srec.after_end", 3],
    ["the same byte twice", file(data, data, end), "srec.overlap", 2],
    ["the reserved type S4", file("S4030000FC", data, end), "srec.unknown_type", 1],
    ["a short record", file("S1070000010203F2", end), "srec.wrong_length", 1],
    ["a record without room for its address", file("S10200FD", end), "srec.wrong_length", 1],
    ["data in an end record", file(data, "S904000001FA"), "srec.wrong_length", 2],
    ["a digit that is none", file("S10700000102030GEE", end), "srec.not_hex", 1],
    ["a count that is another", file(data, "S5030002FA", end), "srec.wrong_count", 2],
    ["a header inside", file(data, head, end), "srec.header_inside", 2],
    ["a record beyond FFFFFFFF", file("S309FFFFFFFE01020304F1", end), "srec.address_out_of_range", 1],
  ])("%s is refused with its line", (_, text, code, line) => {
    expect(() => readSRecords(text)).toThrow(
      expect.objectContaining({ code, details: expect.objectContaining({ line }) }),
    );
  });

  it.each([
    ["lower case", file(head, data, count, end).toLowerCase()],
    ["CRLF", file(head, data, count, end).replaceAll("\n", "\r\n")],
    ["no header", file(data, end)],
    ["a count for an end", file(head, data, count)],
    ["blank lines at the end", `${file(head, data, end)}\n\n`],
  ])("%s is taken", (_, text) => {
    expect(readSRecords(text)).toEqual({
      segments: [{ address: 0, bytes: Uint8Array.of(1, 2, 3, 4) }],
      gaps: [],
      start: null,
    });
  });

  it("takes addresses of three widths side by side, and the start address", () => {
    const text = file("S107000001020304EE", "S206010000AABB93", "S30710000000AABB83", "S9031234B6");
    const { segments, start } = readSRecords(text);
    expect(segments.map(({ address }) => address)).toEqual([0, 0x1_0000, 0x1000_0000]);
    expect(start).toBe(0x1234);
  });
});
