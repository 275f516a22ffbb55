import type { JointSymbols } from "@/builders/bundle/joint-symbols";

/** Data of a HEX, all its runs one behind the other: positions `from` up to, not including, `end`. */
export interface HexStretch {
  from: number;
  end: number;
}

/** Data without a gap from an address on. */
export interface HexRun extends HexStretch {
  address: number;
}

/** A stretch and the offset of the image where it lies. */
export interface HexPart extends HexStretch {
  at: number;
}

export interface PlaceTask extends JointSymbols {
  /** By rising address. */
  runs: readonly HexRun[];
  /** Bytes of the image that belong together, fields and checksums: in the HEX, without a gap or jump inside. */
  fields: readonly { at: number; end: number }[];
}

/**
 * How runs may lie: all at the distances that they have in the device, each anywhere as a whole, or cut at so many places
 * (segments that touch in the device are one run).
 */
export type PlacingWay = "one base" | "whole runs" | { cuts: number };

/**
 * Steps of one search, some 10 to 100 ns each: a layout of 100 segments takes a few thousand, and a bundle that was made to
 * be searched for ever is given up after a fraction of a second.
 */
const STEPS = 4_000_000;
/** More jumps than the segments of a layout and the ranges that it keeps can make. */
const MOST_RUNS = 256;

class OutOfSteps extends Error {}

/** Looks for where the runs of a HEX lie in the image. */
export class RunPlacer {
  readonly #task: PlaceTask;
  readonly #bytes: number;
  /** How far the symbol at a place repeats, so that long fill is compared in one step. */
  readonly #sameInImage: Uint32Array;
  readonly #sameInHex: Uint32Array;
  /** The first offset from here on that a field has; the length of the image where none does. */
  readonly #nextField: Uint32Array;
  /** 1 where a part may not begin or end: between two bytes of a field. */
  readonly #inner: Uint8Array;
  /** What was tried in vain. */
  readonly #dead = new Set<string>();
  #steps = STEPS;

  constructor(task: PlaceTask) {
    this.#task = task;
    this.#bytes = task.image.length;
    this.#sameInImage = repeats(task.image);
    this.#sameInHex = repeats(task.hex);
    this.#inner = new Uint8Array(this.#bytes + 1);
    for (const { at, end } of task.fields) this.#inner.fill(1, at + 1, end);
    this.#nextField = nextOffsets(task.fields, this.#bytes);
  }

  /**
   * Bytes of the image outside all parts are kept ranges.
   * @returns the parts; `none` where nothing fits; `unknown` where trying took too many steps to tell.
   */
  find(way: PlacingWay): HexPart[] | "none" | "unknown" {
    this.#steps = STEPS;
    this.#dead.clear();
    try {
      if (way === "one base") return this.#findOneBase() ?? "none";
      if (this.#task.runs.length > MOST_RUNS) return "unknown";
      return this.#place(0, this.#task.runs, way === "whole runs" ? 0 : way.cuts) ?? "none";
    } catch (error) {
      if (error instanceof OutOfSteps) return "unknown";
      throw error;
    }
  }

  /** The rarest symbol tells the few base addresses that may be. */
  #findOneBase(): HexPart[] | undefined {
    const { image, hex, runs } = this.#task;
    const rarest = rarestOf(hex, image);
    const run = runs.find(({ from, end }) => rarest >= from && rarest < end);
    if (!run) return undefined;
    const address = run.address + rarest - run.from;
    for (let at = image.indexOf(hex[rarest] as number); at >= 0; at = image.indexOf(hex[rarest] as number, at + 1)) {
      const parts = this.#partsFrom(address - at);
      if (parts) return parts;
    }
    return undefined;
  }

  #partsFrom(base: number): HexPart[] | undefined {
    const parts: HexPart[] = [];
    let next = 0;
    for (const { address, from, end } of this.#task.runs) {
      const at = address - base;
      const fits = base >= 0 && at >= 0 && this.#isFree(next, at) && this.#matching(from, end, at) === end - from;
      if (!fits) return undefined;
      next = at + end - from;
      parts.push({ from, end, at });
    }
    return this.#isFree(next, this.#bytes) ? parts : undefined;
  }

  #place(next: number, left: readonly HexStretch[], cuts: number): HexPart[] | undefined {
    if (left.length === 0) return this.#isFree(next, this.#bytes) ? [] : undefined;
    const key = `${next} ${cuts} ${left.map(({ from, end }) => `${from}-${end}`)}`;
    this.#spend(key.length);
    if (this.#dead.has(key)) return undefined;
    const spare = this.#bytes - next - left.reduce((sum, { from, end }) => sum + end - from, 0);
    for (let at = next; at <= next + spare; at++) {
      const parts = this.#placeAt(at, left, cuts);
      if (parts) return parts;
      if (this.#nextField[at] === at) break;
    }
    this.#dead.add(key);
    return undefined;
  }

  #placeAt(at: number, left: readonly HexStretch[], cuts: number): HexPart[] | undefined {
    for (const run of left) {
      for (const { from, end } of this.#stretchesAt(at, run, cuts)) {
        const remaining = left.flatMap((one) => (one === run ? remains(run, { from, end }) : [one]));
        const rest = this.#place(at + end - from, remaining, cuts - cutsOf(run, { from, end }));
        if (rest) return [{ from, end, at }, ...rest];
      }
    }
    return undefined;
  }

  /** The whole run or, with cuts, stretches of it that the image holds at an offset; longer ones first. */
  *#stretchesAt(at: number, run: HexStretch, cuts: number): Generator<HexStretch> {
    const lastStart = cuts > 0 ? run.end - 1 : run.from;
    for (let from = run.from; from <= lastStart; from++) {
      for (let end = from + this.#matching(from, run.end, at); end > from; end--) {
        if (cutsOf(run, { from, end }) > cuts) break;
        this.#spend(1);
        if (!this.#inner[at + end - from]) yield { from, end };
      }
    }
  }

  /** Length of what HEX and image have in common from a position and an offset on. */
  #matching(from: number, end: number, at: number): number {
    const { image, hex } = this.#task;
    const most = Math.min(end - from, this.#bytes - at);
    let length = 0;
    while (length < most && hex[from + length] === image[at + length]) {
      this.#spend(1);
      length += Math.min(this.#sameInHex[from + length] as number, this.#sameInImage[at + length] as number);
    }
    this.#spend(1);
    return Math.min(length, most);
  }

  #isFree(from: number, end: number): boolean {
    return from <= end && (this.#nextField[from] as number) >= end;
  }

  #spend(steps: number): void {
    this.#steps -= steps;
    if (this.#steps < 0) throw new OutOfSteps();
  }
}

function cutsOf(run: HexStretch, part: HexStretch): number {
  return Number(part.from > run.from) + Number(part.end < run.end);
}

function remains(run: HexStretch, part: HexStretch): HexStretch[] {
  const around = [
    { from: run.from, end: part.from },
    { from: part.end, end: run.end },
  ];
  return around.filter(({ from, end }) => from < end);
}

function repeats(symbols: Uint32Array): Uint32Array {
  const lengths = new Uint32Array(symbols.length).fill(1);
  for (let i = symbols.length - 2; i >= 0; i--) {
    if (symbols[i] === symbols[i + 1]) lengths[i] = (lengths[i + 1] as number) + 1;
  }
  return lengths;
}

function nextOffsets(fields: PlaceTask["fields"], bytes: number): Uint32Array {
  const next = new Uint32Array(bytes + 1).fill(bytes);
  for (const { at, end } of fields) for (let i = at; i < end; i++) next[i] = i;
  for (let i = bytes - 1; i >= 0; i--) next[i] = Math.min(next[i] as number, next[i + 1] as number);
  return next;
}

/** Position in `hex` of the symbol that `image` has least often. */
function rarestOf(hex: Uint32Array, image: Uint32Array): number {
  const counts = new Map<number, number>();
  for (const symbol of image) counts.set(symbol, (counts.get(symbol) ?? 0) + 1);
  let rarest = 0;
  hex.forEach((symbol, i) => {
    if ((counts.get(symbol) ?? 0) < (counts.get(hex[rarest] as number) ?? 0)) rarest = i;
  });
  return rarest;
}
