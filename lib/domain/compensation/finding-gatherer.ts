import { type FindingCode, makeFinding } from "./findings";
import type { Finding } from "./types";

/** Names that a gathered finding lists; the count is always whole. */
const NAMED_MAX = 20;

interface Gathered {
  code: FindingCode;
  point: number | null;
  serials: Set<string>;
  worst: number;
  data: Record<string, unknown>;
}

/**
 * Gathers equal findings of many devices into one a code and point, so that a lot read too early is one thing to
 * decide, not thousands. A finding of a single device names it in `serial`; else `data` has the count and first names.
 */
export class FindingGatherer {
  private readonly gathered = new Map<string, Gathered>();

  /** @param badness the data of the largest one is kept. */
  add(code: FindingCode, serial: string, point: number | null, badness: number, data: Record<string, unknown>): void {
    const key = `${code} ${point}`;
    const known = this.gathered.get(key);
    if (!known) {
      this.gathered.set(key, { code, point, serials: new Set([serial]), worst: badness, data });
      return;
    }
    known.serials.add(serial);
    if (badness > known.worst) {
      known.worst = badness;
      known.data = data;
    }
  }

  /** In the order in which each was first met. */
  list(): Finding[] {
    return [...this.gathered.values()].map(({ code, point, serials, data }) => {
      const names = [...serials];
      const facts = { ...data, devices: names.length, serials: names.slice(0, NAMED_MAX) };
      return makeFinding(code, { serial: names.length === 1 ? names[0] : null, point, data: facts });
    });
  }
}
