import { readFileSync } from "node:fs";
import { join } from "node:path";
import { describe, expect, it } from "vitest";
import { makeChecksum } from "@/builders/codec/checksum-algorithm";
import { CRC_CATALOGUE, type CrcParameters, getCrc, makeCrc } from "@/builders/codec/crc";
import { PYTHON, runTool } from "@/tests/support/programs";

interface CatalogueEntry {
  name: string;
  width: number;
  poly: string;
  init: string;
  refin: boolean;
  refout: boolean;
  xorout: string;
  check: string;
}

const vectors = JSON.parse(
  readFileSync(join(import.meta.dirname, "../../fixtures/published/vectors.json"), "utf8"),
) as {
  crc_123456789: CatalogueEntry[];
};
const digits = new TextEncoder().encode("123456789");
/** The data names CRC-32C by both of its names. */
const nameOf = (entry: CatalogueEntry) => entry.name.replace(" (CRC-32C)", "");

describe("cyclic redundancy checks", () => {
  // Source: public catalogue of parametrised CRC algorithms, check values of the ASCII digits 1 to 9.
  const supported = vectors.crc_123456789.filter((one) => one.width <= 32);

  it("covers every algorithm of the catalogue of up to 32 bits", () => {
    const names = supported.map(nameOf).sort();
    expect(Object.keys(CRC_CATALOGUE).sort()).toEqual(names);
  });

  it.each(supported)("$name gives $check", (entry) => {
    expect(getCrc(nameOf(entry))(digits, 0, 9)).toBe(Number.parseInt(entry.check, 16));
  });

  it.each(supported)("$name has the published parameters", (entry) => {
    const hex = (text: string) => Number.parseInt(text, 16);
    expect(CRC_CATALOGUE[nameOf(entry)]).toEqual({
      width: entry.width,
      poly: hex(entry.poly),
      init: hex(entry.init),
      refin: entry.refin,
      refout: entry.refout,
      xorout: hex(entry.xorout),
    });
  });

  it.each(supported)(
    "by the parameters of $name gives $check",
    ({ width, poly, init, refin, refout, xorout, check }) => {
      const byParameters = makeChecksum({ width, poly, init, refin, refout, xorout });
      expect(byParameters(digits, 0, 9)).toBe(Number.parseInt(check, 16));
    },
  );

  // Source: the same catalogue, as python3-crccheck carries it: every algorithm of our widths, with its check value.
  it("gives the check value of every algorithm of 8, 16, 24 and 32 bits that python3-crccheck knows", () => {
    const script = `
import json
from crccheck import crc
print(json.dumps([{"name": c.__name__, "width": c._width, "poly": "%x" % c._poly, "init": "%x" % c._initvalue,
  "refin": bool(c._reflect_input), "refout": bool(c._reflect_output), "xorout": "%x" % c._xor_output, "check": c._check_result}
  for c in crc.ALLCRCCLASSES if c._width in (8, 16, 24, 32) and c._check_result is not None]))`;
    const known = JSON.parse(runTool(PYTHON, ["-c", script]).toString()) as (Omit<CatalogueEntry, "check"> & {
      check: number;
    })[];
    expect(known.filter((one) => one.width === 24).length).toBeGreaterThan(3);
    expect(known.length).toBeGreaterThan(50);
    const ours = known.map(({ name, check: _, ...parameters }) => [name, makeChecksum(parameters)(digits, 0, 9)]);
    expect(ours).toEqual(known.map(({ name, check }) => [name, check]));
  });

  const bytes = Uint8Array.from({ length: 300 }, (_, i) => (i * 167 + 13) & 0xff);

  it("agrees with rhash on longer data", () => {
    const read = (option: string) => runTool("rhash", [option, "--simple", "-"], bytes).toString().split(/\s/)[0];
    const hex = (name: string) => getCrc(name)(bytes, 0, bytes.length).toString(16).padStart(8, "0");
    expect(hex("CRC-32/ISO-HDLC")).toBe(read("--crc32")?.toLowerCase());
    expect(hex("CRC-32/ISCSI")).toBe(read("--crc32c")?.toLowerCase());
  });

  it("agrees with python3-crccheck on any parameters", () => {
    const widths = [8, 16, 24, 32] as const;
    const cases: CrcParameters[] = Array.from({ length: 80 }, (_, i) => {
      const width = widths[i % 4] as 8 | 16 | 24 | 32;
      const top = 2 ** width;
      const value = (salt: number) => (Math.imul(i + 1, salt) >>> 0) % top;
      return {
        width,
        poly: value(0x9e3779b1) | 1,
        init: value(0x85ebca77),
        refin: i % 3 === 0,
        refout: i % 5 < 2,
        xorout: value(0xc2b2ae3d),
      };
    }).map((one) => ({ ...one, poly: one.poly >>> 0 }));
    const script = `
import json, sys
from crccheck.crc import Crc
given = json.load(sys.stdin)
data = bytes(given["bytes"])
print(json.dumps([Crc(p["width"], p["poly"], initvalue=p["init"], reflect_input=p["refin"], reflect_output=p["refout"], xor_output=p["xorout"]).process(data).final() for p in given["cases"]]))`;
    const reply = runTool(PYTHON, ["-c", script], JSON.stringify({ bytes: [...bytes], cases }));
    const expected = JSON.parse(reply.toString()) as number[];
    expect(cases.map((one) => makeCrc(one)(bytes, 0, bytes.length))).toEqual(expected);
  });

  it("agrees with sums and exclusive or as Python makes them", () => {
    const script = `
import json, sys
from functools import reduce
data = bytes(json.load(sys.stdin))
total, mixed = sum(data), reduce(lambda a, b: a ^ b, data)
print(json.dumps([[v % m, ~v % m, -v % m] for v, m in ((total, 2**8), (total, 2**16), (total, 2**32), (mixed, 2**8))]))`;
    const expected = JSON.parse(runTool(PYTHON, ["-c", script], JSON.stringify([...bytes])).toString()) as number[][];
    const complements = ["none", "ones", "twos"] as const;
    const ours = [{ sum: 8 }, { sum: 16 }, { sum: 32 }, { xor: 8 }].map((one) =>
      complements.map((complement) => makeChecksum({ ...one, complement })(bytes, 0, bytes.length)),
    );
    expect(ours).toEqual(expected);
  });

  it("takes the part of the bytes that it is told", () => {
    const padded = Uint8Array.from([1, 2, ...digits, 3]);
    expect(getCrc("CRC-16/IBM-3740")(padded, 2, 11)).toBe(0x29b1);
  });

  it("refuses a name that is not in the catalogue", () => {
    expect(() => getCrc("CRC-16/NONE")).toThrow(expect.objectContaining({ code: "checksum.unknown_algorithm" }));
    expect(() => getCrc("toString")).toThrow(expect.objectContaining({ code: "checksum.unknown_algorithm" }));
  });
});
