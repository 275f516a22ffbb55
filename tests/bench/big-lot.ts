/** A lot of any size with the readings of its runs, drawn from the demo's drift parameters. */

import { drawDevice } from "@/lib/demo/device-model";
import { benchFamily, type DemoFamily } from "@/lib/demo/families";
import { seededRandom } from "@/lib/demo/random";
import { type RunPlan, writeRunCsv } from "@/lib/demo/readings-csv";

export interface BigLot {
  code: string;
  family: DemoFamily;
  serials: string[];
  runs: { purpose: RunPlan["purpose"]; bytes: Buffer }[];
}

const SAMPLE = 10;
const VERIFICATION = 5;
const SEED = 5_000;

/**
 * 10 devices of a sample and 5 of a verification at three temperatures, all others with a zero run at two and a span run.
 * @param code begins every serial, so that two lots share none.
 */
export function makeBigLot(code: string, count: number): BigLot {
  const family = benchFamily;
  const random = seededRandom(SEED + code.charCodeAt(code.length - 1));
  const devices = Array.from({ length: count }, (_, index) =>
    drawDevice(random, family.parameters, `${code}-${String(index + 1).padStart(5, "0")}`),
  );
  const { temperatureMinC: low, temperatureMaxC: high, referenceC } = family.document;
  const near = referenceC + 1.5;
  const all = [low, near, high];
  const rest = devices.slice(SAMPLE, -VERIFICATION);
  const plans = [
    { purpose: "sample", devices: devices.slice(0, SAMPLE), temperaturesC: all },
    { purpose: "zero", devices: rest, temperaturesC: [low, high] },
    { purpose: "span", devices: rest, temperaturesC: [near] },
    { purpose: "verification", devices: devices.slice(-VERIFICATION), temperaturesC: all },
  ] as const;
  const startedAt = new Date("2026-09-14T06:00:00Z");
  const drift = { family: family.document, parameters: family.parameters, random };
  const runs = plans.map((plan) => ({ purpose: plan.purpose, bytes: writeRunCsv({ ...plan, startedAt }, drift) }));
  return { code, family, serials: devices.map((device) => device.serial), runs };
}
