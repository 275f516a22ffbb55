import { describe, expect, it } from "vitest";
import { jointSymbols } from "@/builders/bundle/joint-symbols";
import { type PlaceTask, RunPlacer } from "@/builders/bundle/place-runs";

/** A task from texts: a character a byte, runs by address. */
function task(image: string, runs: [address: number, data: string][], fields: [at: number, end: number][]): PlaceTask {
  let next = 0;
  return {
    image: symbols(image),
    hex: symbols(runs.map(([, data]) => data).join("")),
    runs: runs.map(([address, data]) => {
      const from = next;
      next += data.length;
      return { address, from, end: next };
    }),
    fields: fields.map(([at, end]) => ({ at, end })),
  };
}

const symbols = (text: string) => Uint32Array.from(Buffer.from(text));
const places = (found: ReturnType<RunPlacer["find"]>) =>
  typeof found === "string" ? found : found.map(({ at }) => at);

describe("placing the runs of a HEX", () => {
  it("finds the one base address, whatever is kept at start, end and between", () => {
    const fields: [number, number][] = [
      [3, 5],
      [8, 10],
    ];
    const kept = task(
      "...ab...cd..",
      [
        [0x102, ".ab"],
        [0x107, ".cd"],
      ],
      fields,
    );
    expect(places(new RunPlacer(kept).find("one base"))).toEqual([2, 7]);
    const lower = task("...ab...cd..", [[1, "ab...cd"]], fields);
    expect(new RunPlacer(lower).find("one base")).toBe("none");
  });

  it("finds no base under which a field would be kept", () => {
    expect(new RunPlacer(task("ab..", [[1, "b.."]], [[0, 2]])).find("one base")).toBe("none");
    expect(new RunPlacer(task("ab..", [[1, "b.."]], [[1, 2]])).find("one base")).toHaveLength(1);
  });

  it("finds another order than that of the addresses, with ranges kept", () => {
    const apart = task(
      "ab..cd.ef",
      [
        [10, "ef"],
        [20, "cd"],
        [90, "ab."],
      ],
      [
        [0, 2],
        [4, 6],
        [7, 9],
      ],
    );
    expect(new RunPlacer(apart).find("one base")).toBe("none");
    expect(new RunPlacer(apart).find("whole runs")).toEqual([
      { from: 4, end: 7, at: 0 },
      { from: 2, end: 4, at: 4 },
      { from: 0, end: 2, at: 7 },
    ]);
  });

  it("never takes a field apart", () => {
    const runs: [number, string][] = [
      [10, "b"],
      [20, "a"],
    ];
    expect(new RunPlacer(task("ab", runs, [[0, 2]])).find("whole runs")).toBe("none");
    expect(places(new RunPlacer(task("ab", runs, [])).find("whole runs"))).toEqual([0, 1]);
  });

  it("cuts a run where it is told to, at most so often", () => {
    const turned = task("abcdef", [[0, "efcdab"]], [[0, 2]]);
    expect(new RunPlacer(turned).find("whole runs")).toBe("none");
    expect(new RunPlacer(turned).find({ cuts: 1 })).toBe("none");
    expect(places(new RunPlacer(turned).find({ cuts: 2 }))).toEqual([0, 2, 4]);
    expect(places(new RunPlacer(task("abcdef", [[0, "cdefab"]], [])).find({ cuts: 1 }))).toEqual([0, 2]);
  });

  it("finds a hundred runs of a large memory in reverse", () => {
    const bytes = Array.from({ length: 100 }, (_, i) => String.fromCharCode(0x100 + i) + ".".repeat(600));
    const image = Uint32Array.from(bytes.join(""), (sign) => sign.charCodeAt(0));
    const reversed = [...bytes].reverse().join("");
    const runs = bytes.map((_, i) => ({ address: 0x1000 * i, from: 601 * i, end: 601 * (i + 1) }));
    const hex = Uint32Array.from(reversed, (sign) => sign.charCodeAt(0));
    const found = new RunPlacer({ image, hex, runs, fields: [] }).find("whole runs");
    expect(places(found)).toEqual(runs.map(({ from }) => from));
  });

  it("finds nothing in nothing, and an image of which everything is kept", () => {
    expect(new RunPlacer(task("....", [], [])).find("whole runs")).toEqual([]);
    expect(new RunPlacer(task("....", [], [[0, 1]])).find("whole runs")).toBe("none");
    expect(new RunPlacer(task("..", [[0, "..."]], [])).find("whole runs")).toBe("none");
  });

  it("gives up what was made to be tried for ever", () => {
    // Spaces and runs of one symbol, all runs even and both spaces odd: every set of runs has to be tried.
    const lengths = Array.from({ length: 40 }, (_, i) => 2 * (i + 1));
    const half = lengths.reduce((sum, length) => sum + length, 0) / 2 - 1;
    const runs = lengths.map((length, i): [number, string] => [1000 * i, ".".repeat(length)]);
    const odd = `${".".repeat(half % 2 ? half : half - 1)}a`;
    const image = `${odd}${odd}${".".repeat(2 * (half - odd.length + 2))}`;
    const pack = task(
      image,
      [...runs, [1e6, "a"], [2e6, "a"]],
      [
        [odd.length - 1, odd.length],
        [2 * odd.length - 1, 2 * odd.length],
      ],
    );
    expect(new RunPlacer(pack).find("whole runs")).toBe("unknown");
    const many = Array.from({ length: 300 }, (_, i): [number, string] => [2 * (300 - i), String(i % 7)]);
    expect(new RunPlacer(task("1".repeat(300), many, [])).find("whole runs")).toBe("unknown");
    // Two symbols in turn, out of step once: a cut may be anywhere and fits for long.
    const turns = task("ab".repeat(30_000), [[0, `${"ab".repeat(15_000)}${"ba".repeat(15_000)}`]], []);
    expect(new RunPlacer(turns).find({ cuts: 1 })).toBe("unknown");
  });
});

describe("joint symbols", () => {
  const device = (image: string, hex: string) => ({ image: Buffer.from(image), hex: Buffer.from(hex) });

  it("are the same where every device has the same byte in both places", () => {
    const { image, hex } = jointSymbols([device("aab", "ba"), device("xyx", "xx")]);
    expect(image[0]).toBe(hex[1]);
    expect(image[2]).toBe(hex[0]);
    expect(new Set([...image]).size).toBe(3);
  });
});
