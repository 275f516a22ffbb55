import type { Bench, BenchTools, Outcome } from "@/lib/commands/bench";
import { derive } from "@/lib/domain/compensation/derive";
import type { DerivationInput } from "@/lib/domain/compensation/types";
import { parseReadingsCsv } from "@/lib/domain/readings/parse-readings-csv";
import { makeBigLot } from "./big-lot";
import { cpuSeconds, spreadOf, spreadText } from "./measure";

/** Rounds by number of devices, and the goal where there is one. The first round warms up and does not count. */
const CASES = [
  { devices: 5_000, rounds: 8, goal: 1 },
  { devices: 50_000, rounds: 4, goal: undefined },
];

const bench: Bench = {
  title: "CPU seconds of a pooled-gain derivation, from readings in memory to coefficients, verdicts and findings",
  async run(tools) {
    const outcomes: Outcome[] = [];
    for (const { devices, rounds, goal } of CASES) {
      if (tools.signal.aborted) break;
      const value = await medianOf(tools, await readLot(devices), rounds);
      const what = `derivation of ${devices.toLocaleString("en")} devices`;
      outcomes.push({ what, value, unit: "CPU s", ...(goal !== undefined && { goal }) });
    }
    return outcomes;
  },
};

export default bench;

async function readLot(devices: number): Promise<DerivationInput> {
  const { family, runs } = makeBigLot("BENCH", devices);
  const read = [];
  for (const { purpose, bytes } of runs) {
    read.push({ id: purpose, purpose, readings: (await parseReadingsCsv(bytes)).readings });
  }
  return { family: family.document, method: "pooled-gain", order: 1, exclude: [], runs: read };
}

async function medianOf({ say }: BenchTools, input: DerivationInput, rounds: number): Promise<number> {
  const measured: number[] = [];
  for (let round = 0; round < rounds; round++) {
    const seconds = await cpuSeconds(() => derive(input));
    if (round > 0) measured.push(seconds);
  }
  const rows = input.runs.reduce((sum, run) => sum + run.readings.length, 0);
  say(`${rows.toLocaleString("en")} readings: ${spreadText(spreadOf(measured), "CPU s")}`);
  return spreadOf(measured).median;
}
