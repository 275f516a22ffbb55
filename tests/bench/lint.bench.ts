import { judgeText } from "@/app/(site)/families/[family]/layouts/judge-text";
import { findMends } from "@/builders/codec/mend/find-mend";
import { coefficientsOfOrder } from "@/builders/codec/sources";
import type { Bench, Outcome } from "@/lib/commands/bench";
import type { LayoutDocument, LayoutField } from "@/schemas/documents/layout";
import { type Spread, spreadOf, spreadText } from "./measure";

const FIELDS = 300;
const ROUNDS = 60;

/** A layout of 300 fields, 294 of them constants, with a checksum over every 64 bytes. */
function largeLayout(version: string, shift = 0): LayoutDocument {
  const coefficients = coefficientsOfOrder(1).map(
    (name, i): LayoutField => ({ name, at: 4 * i, type: "f32", value: { from: `coefficients.${name}` } }),
  );
  const constants = Array.from({ length: FIELDS - coefficients.length }, (_, i): LayoutField => {
    const at = 64 + 8 * i + shift;
    return { name: `value${i}`, at, type: "i24", scale: 1e-6, unit: "mV/V", min: -1, max: 1, value: { const: 0.5 } };
  });
  const checksums = Array.from({ length: 40 }, (_, i) => {
    return {
      name: `crc${i}`,
      at: 3072 + 2 * i,
      algorithm: "CRC-16/IBM-3740",
      over: [64 * i, 64 * i + 63] as [number, number],
    };
  });
  const memory = { bytes: 4096, pageBytes: 64, baseAddress: 0, fill: 255, byteOrder: "little" as const };
  const head = {
    format: "trimwright/layout@1" as const,
    family: "LC-1",
    firmware: ">=1.0.0 <2.0.0",
    order: 1 as const,
  };
  return { ...head, version, memory, fields: [...coefficients, ...constants], checksums };
}

const family = {
  code: "LC-1",
  referenceC: 20,
  capacityKg: 20,
  nominalMvV: 2,
  vMinRatioY: 1e4,
  temperatureMinC: -10,
  temperatureMaxC: 40,
};

/** Milliseconds of many runs; the first ones warm the code up. */
function timesOf(run: () => void): Spread {
  for (let i = 0; i < 10; i++) run();
  const times = Array.from({ length: ROUNDS }, () => {
    const start = performance.now();
    run();
    return performance.now() - start;
  });
  return spreadOf(times);
}

/** What the editor does after a key: shape, sense, the step against what is published, places for markers and map. */
const bench: Bench = {
  title: `a text of ${FIELDS} fields, judged as the editor judges it`,
  run: async ({ say }) => {
    const options = { family, publishedVersions: [largeLayout("1.0.0"), largeLayout("1.1.0", 1)] };
    const texts = {
      "without findings": JSON.stringify(largeLayout("2.0.0"), null, 2),
      "with a finding a field": JSON.stringify(largeLayout("2.0.0", 5), null, 2).replaceAll('"max": 1', '"max": 1e6'),
    };
    const outcomes: Outcome[] = [];
    for (const [what, text] of Object.entries(texts)) {
      const { errors, warnings } = judgeText(text, options);
      const spread = timesOf(() => void judgeText(text, options));
      say(
        `${what}: ${text.length} characters, ${errors.length} errors, ${warnings.length} warnings; ${spreadText(spread, "ms")}`,
      );
      outcomes.push({
        what: `lint of ${FIELDS} fields ${what}, median of ${ROUNDS}`,
        value: spread.median,
        unit: "ms",
        goal: 50,
      });
      if (errors.length === 0) continue;
      const mends = timesOf(() => void findMends(errors.slice(0, 30), text, options));
      outcomes.push({ what: "its first 30 mends", value: mends.median, unit: "ms" });
    }
    return outcomes;
  },
};

export default bench;
