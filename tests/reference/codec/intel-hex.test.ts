import { readFileSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { describe, expect, it } from "vitest";
import { readIndependently } from "@/builders/bundle/independent-read";
import { readIntelHex } from "@/builders/codec/files/intel-hex-read";
import { upperAddressRecord, writeIntelHex } from "@/builders/codec/files/intel-hex-write";
import { inFolder, PYTHON, runTool } from "@/tests/support/programs";

const vectors = JSON.parse(
  readFileSync(join(import.meta.dirname, "../../fixtures/published/vectors.json"), "utf8"),
) as {
  intel_hex_records: Record<string, string>;
};
const image = Uint8Array.from({ length: 200 }, (_, i) => (i * 73 + 5) & 0xff);
const BASES = [
  { name: "0", base: 0 },
  { name: "above 64 K", base: 0x12340 },
  { name: "across a 64 K edge", base: 0xffe8 },
  { name: "0x08000000", base: 0x0800_0000 },
  { name: "across an edge at 0x0801FFFE", base: 0x0801_fffe },
  { name: "0x80000000", base: 0x8000_0000 },
  { name: "across 0x80000000", base: 0x7fff_ffe8 },
];

describe("Intel HEX as outside programs read it", () => {
  describe.each(BASES)("at $name", ({ base }) => {
    const hex = writeIntelHex(image, base, []);

    it("objcopy (binutils) gives the bytes back", async () => {
      await inFolder((folder) => {
        writeFileSync(join(folder, "a.hex"), hex);
        runTool("objcopy", ["-I", "ihex", "-O", "binary", "a.hex", "a.bin"], undefined, folder);
        expect(new Uint8Array(readFileSync(join(folder, "a.bin")))).toEqual(image);
      });
    });

    it("srec_cat (srecord) gives the bytes back", async () => {
      await inFolder((folder) => {
        writeFileSync(join(folder, "a.hex"), hex);
        runTool("srec_cat", ["a.hex", "-intel", "-offset", `-${base}`, "-o", "a.bin", "-binary"], undefined, folder);
        expect(new Uint8Array(readFileSync(join(folder, "a.bin")))).toEqual(image);
      });
    });

    it("python3-intelhex gives the bytes back", () => {
      const script = `
import io, sys
from intelhex import IntelHex
read = IntelHex(io.StringIO(sys.stdin.read()))
sys.stdout.buffer.write(bytes([read.minaddr() == ${base}]) + bytes(read.tobinarray()))`;
      expect(new Uint8Array(runTool(PYTHON, ["-c", script], hex))).toEqual(Uint8Array.from([1, ...image]));
    });

    it("npm intel-hex gives the bytes back", () => {
      expect(readIndependently(hex, { bytes: 200, baseAddress: base, fill: 0xff, kept: [] })).toEqual(image);
    });

    it("our own reader gives the bytes back", () => {
      expect(readIntelHex(hex)).toEqual({ segments: [{ address: base, bytes: image }], gaps: [], start: null });
    });

    it("we read what objcopy and srec_cat write", async () => {
      await inFolder((folder) => {
        writeFileSync(join(folder, "a.bin"), image);
        runTool(
          "objcopy",
          ["-I", "binary", "-O", "ihex", `--change-addresses=${base}`, "a.bin", "o.hex"],
          undefined,
          folder,
        );
        runTool("srec_cat", ["a.bin", "-binary", "-offset", `${base}`, "-o", "s.hex", "-intel"], undefined, folder);
        for (const file of ["o.hex", "s.hex"]) {
          const { segments, gaps } = readIntelHex(readFileSync(join(folder, file), "latin1"));
          expect({ segments, gaps }).toEqual({ segments: [{ address: base, bytes: image }], gaps: [] });
        }
      });
    });
  });

  it("leaves kept ranges to the device for every reader", async () => {
    const hex = writeIntelHex(image, 0x1000, [
      [20, 24],
      [199, 199],
    ]);
    await inFolder((folder) => {
      writeFileSync(join(folder, "a.hex"), hex);
      runTool("objcopy", ["-I", "ihex", "-O", "binary", "--gap-fill=0xee", "a.hex", "a.bin"], undefined, folder);
      const expected = image.slice(0, 199).fill(0xee, 20, 25);
      expect(new Uint8Array(readFileSync(join(folder, "a.bin")))).toEqual(expected);
    });
  });
});

describe("single records", () => {
  // Source: record layout of the Hexadecimal Object File Format Specification, Rev. A, 1988; sums checked by three readers.
  const records = vectors.intel_hex_records as Record<string, string> & { eof: string };
  const withEnd = (record: string) => `${record}\n${records.eof}\n`;

  it.each(Object.entries(records).filter(([name]) => name !== "eof"))("%s is read", (_, record) => {
    expect(() => readIntelHex(withEnd(record))).not.toThrow();
  });

  it("hold what they say", () => {
    expect(readIntelHex(withEnd(records.data_1byte_1234 as string)).segments).toEqual([
      { address: 0x1234, bytes: Uint8Array.of(0) },
    ]);
    expect(readIntelHex(withEnd(records.start_linear_0x000000CD as string)).start).toBe(0xcd);
    expect(readIntelHex(withEnd(records["start_segment_0000:3800"] as string)).start).toBe(0x3800);
    const moved = `${records.ext_segment_0x1200}\n${records.data_0100}`;
    expect(readIntelHex(withEnd(moved)).segments[0]?.address).toBe(0x12100);
    const high = `${records.ext_linear_0xFFFF}\n${records.data_0100}`;
    expect(readIntelHex(withEnd(high)).segments[0]?.address).toBe(0xffff_0100);
    expect(readIntelHex(withEnd(records.zero_length_data as string)).segments).toEqual([]);
  });

  it("are written as published", () => {
    expect(upperAddressRecord(0x0800)).toBe(`${records.ext_linear_0x0800}\n`);
    expect(upperAddressRecord(0xffff)).toBe(`${records.ext_linear_0xFFFF}\n`);
    const erased = writeIntelHex(new Uint8Array(16).fill(0xff), 0x10, []);
    expect(erased).toBe(`${records.data_erased_0010}\n${records.eof}\n`);
  });
});

describe("malformed files", () => {
  const data = ":0400000001020304F2";
  const end = ":00000001FF";
  const file = (...lines: string[]) => `${lines.join("\n")}\n`;

  // More of the strict reading; what other readers do with such files is in malformed-hex.test.ts.
  it.each([
    ["an empty file", "", "hex.no_end", 0],
    ["half a digit pair", file(":0400000001020304F", end), "hex.wrong_length", 1],
    ["an address record of one byte", file(":0100000408F3", end), "hex.wrong_length", 1],
    ["a start record of two bytes", file(":020000050000F9", end), "hex.wrong_length", 1],
    ["a record beyond FFFFFFFF", file(":02000004FFFFFC", ":04FFFE0001020304F5", end), "hex.address_out_of_range", 2],
  ])("%s is refused with its line", (_, text, code, line) => {
    expect(() => readIntelHex(text)).toThrow(
      expect.objectContaining({ code, details: expect.objectContaining({ line }) }),
    );
  });

  it.each([
    ["lower case", file(data, end).toLowerCase()],
    ["CRLF", file(data, end).replaceAll("\n", "\r\n")],
    ["no line end at the end", `${data}\n${end}`],
    ["blank lines at the end", `${data}\n${end}\n\n`],
  ])("%s is taken", (_, text) => {
    expect(readIntelHex(text).segments).toEqual([{ address: 0, bytes: Uint8Array.of(1, 2, 3, 4) }]);
  });

  it("takes records in falling order and reports gaps", () => {
    const { segments, gaps } = readIntelHex(file(":01001000AA45", data, end));
    expect(segments.map((one) => one.address)).toEqual([0, 16]);
    expect(gaps).toEqual([{ address: 4, length: 12 }]);
  });

  it("is kept from the independent reader, which says nothing of overlaps and gaps", () => {
    const target = { bytes: 4, baseAddress: 0, fill: 0xff, kept: [] };
    const refuse = (text: string, code: string, bytes = 4) =>
      expect(() => readIndependently(text, { ...target, bytes })).toThrow(expect.objectContaining({ code }));
    refuse(file(data, data, end), "hex.overlap");
    refuse(file(data, end), "hex.incomplete", 5);
    refuse(file(data, end), "hex.outside_memory", 3);
    refuse(file(data, end, data), "hex.unreadable");
    refuse(file(":0400000001020304F3", end), "hex.unreadable");
    refuse(file(data), "hex.unreadable");
    expect(() => readIndependently(file(data, end), { ...target, kept: [[1, 1]] })).toThrow(
      expect.objectContaining({ code: "hex.over_kept" }),
    );
  });
});
