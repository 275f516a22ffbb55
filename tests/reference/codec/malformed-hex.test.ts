import { writeFileSync } from "node:fs";
import { join } from "node:path";
import { describe, expect, it } from "vitest";
import { readIntelHex } from "@/builders/codec/files/intel-hex-read";
import { AppError } from "@/lib/errors";
import { inFolder, PYTHON, tryTool } from "@/tests/support/programs";

const DATA = ":0400000001020304F2";
const END = ":00000001FF";
const file = (...lines: string[]) => `${lines.join("\n")}\n`;

/** What an outside reader makes of a file: bytes, the same with a warning, or an error. */
type Outcome = "reads" | "warns" | "refuses";

interface Malformed {
  name: string;
  text: string;
  /** Code and line of our refusal; null where a strict reader takes the file. */
  ours: [code: string, line: number] | null;
  objcopy: Outcome;
  srecCat: Outcome;
  intelhex: Outcome;
}

const row = (
  name: string,
  text: string,
  ours: Malformed["ours"],
  [objcopy, srecCat, intelhex]: [Outcome, Outcome, Outcome],
): Malformed => ({ name, text, ours, objcopy, srecCat, intelhex });

/**
 * Files that readers disagree about. Strict reading: Hexadecimal Object File Format Specification, Rev. A, 1988, of which no
 * record may be missing, doubled or behind the end. Outcomes of the programs were recorded by running those of Debian 12:
 * objcopy of binutils 2.40, srec_cat of srecord 1.64, python3-intelhex 2.3.0.
 */
const CASES: Malformed[] = [
  row("a wrong checksum", file(":0400000001020304F3", END), ["hex.bad_checksum", 1], ["refuses", "refuses", "refuses"]),
  row("no end record", file(DATA), ["hex.no_end", 1], ["reads", "warns", "reads"]),
  row("lower case", file(DATA, END).toLowerCase(), null, ["reads", "reads", "reads"]),
  row("CRLF", file(DATA, END).replaceAll("\n", "\r\n"), null, ["reads", "reads", "reads"]),
  row("a blank line first", file("", DATA, END), ["hex.not_a_record", 1], ["refuses", "reads", "reads"]),
  row("a blank line inside", file(DATA, "", END), ["hex.not_a_record", 2], ["reads", "reads", "reads"]),
  row("text before", file("hello", DATA, END), ["hex.not_a_record", 1], ["refuses", "warns", "refuses"]),
  row("data after the end", file(DATA, END, ":0400040005060708DE"), ["hex.after_end", 3], ["reads", "reads", "reads"]),
  row("a byte twice, same value", file(DATA, DATA, END), ["hex.overlap", 2], ["reads", "warns", "refuses"]),
  row(
    "a byte twice, other value",
    file(DATA, ":0100030009F3", END),
    ["hex.overlap", 2],
    ["reads", "refuses", "refuses"],
  ),
  row("record type 06", file(":00000006FA", DATA, END), ["hex.unknown_type", 1], ["refuses", "refuses", "refuses"]),
  row("a short record", file(":04000000010203F6", END), ["hex.wrong_length", 1], ["refuses", "refuses", "refuses"]),
  row("a long record", file(":040000000102030405ED", END), ["hex.wrong_length", 1], ["refuses", "refuses", "refuses"]),
  row("a digit that is none", file(":04000000010203G4F2", END), ["hex.not_hex", 1], ["refuses", "refuses", "refuses"]),
  row("a data record without data", file(":0000000000", DATA, END), null, ["reads", "warns", "reads"]),
  row("falling addresses", file(":0100040005F6", DATA, END), null, ["reads", "warns", "reads"]),
  row("an end with an offset", file(DATA, ":00000101FE"), ["hex.nonzero_offset", 2], ["reads", "reads", "reads"]),
  row(
    "an address record with an offset",
    file(":020001040000F9", DATA, END),
    ["hex.nonzero_offset", 1],
    ["reads", "refuses", "refuses"],
  ),
  row(
    "a record over the end of its segment",
    file(":020000021000EC", ":04FFFE0001020304F5", END),
    ["hex.segment_wrap", 2],
    ["reads", "warns", "reads"],
  ),
  row("a gap", file(DATA, ":01001000AA45", END), null, ["reads", "reads", "reads"]),
];

function outcomeOf({ status, errors }: { status: number; errors: string }): Outcome {
  if (status !== 0) return "refuses";
  return /warning|not in strictly ascending order/.test(errors) ? "warns" : "reads";
}

function ours(text: string): Malformed["ours"] {
  try {
    readIntelHex(text);
    return null;
  } catch (error) {
    if (error instanceof AppError) return [error.code, error.details.line as number];
    throw error;
  }
}

describe("malformed Intel HEX", () => {
  it.each(CASES)("$name", async (one) => {
    await inFolder((folder) => {
      writeFileSync(join(folder, "a.hex"), one.text);
      const run = (program: string, ...args: string[]) => outcomeOf(tryTool(program, args, folder));
      const script = "from intelhex import IntelHex\nIntelHex('a.hex').tobinarray()";
      expect({ ...one, ours: ours(one.text) }).toEqual({
        ...one,
        objcopy: run("objcopy", "-I", "ihex", "-O", "binary", "a.hex", "a.bin"),
        srecCat: run("srec_cat", "a.hex", "-intel", "-o", "b.bin", "-binary"),
        intelhex: run(PYTHON, "-c", script),
      });
    });
  });

  // The 1988 text wraps a record under type 02 inside its segment; srec_cat does, the others carry on. So nobody should write one.
  it("has two readings of a record over the end of its segment", async () => {
    const wrapped = CASES.find((one) => one.ours?.[0] === "hex.segment_wrap");
    await inFolder((folder) => {
      writeFileSync(join(folder, "a.hex"), wrapped?.text ?? "");
      const dump = tryTool("srec_cat", ["a.hex", "-intel", "-o", "-", "-hex-dump"], folder).output;
      expect(dump).toMatch(/^00010000: 03 04/m);
      const script = "from intelhex import IntelHex\nprint(IntelHex('a.hex').segments())";
      expect(tryTool(PYTHON, ["-c", script], folder).output.trim()).toBe("[(131070, 131074)]");
    });
  });
});
