import { execFileSync } from "node:child_process";
import { mkdtempSync, readFileSync, rmSync, statSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { readZip } from "@/builders/bundle/read-zip";
import { sha256Hex } from "@/builders/bundle/sha256";
import type { Bench, BenchTools, Outcome } from "@/lib/commands/bench";
import {
  bareFloorOf,
  buildModel,
  composeModel,
  floorOf,
  MODEL_LAYOUT,
  type ModelDevice,
  modelDevices,
} from "./build/model-job";
import { measureRunning } from "./build/running";
import { spreadOf, spreadText, wallMs } from "./measure";

const DEVICES = 5_000;
/** The first warms up and does not count. */
const ROUNDS = 8;
/** Runs of each in a round. */
const TURNS = 5;
const FLOOR_GOAL = 2;
const PYTHON_GOAL = 1;
/** At least five times as fast: at most this share of its time. */
const CORE_GOAL = 0.2;
const SIZES = [500, 5_000, 50_000];
const EXPONENT_GOAL = 1.15;

const bench: Bench = {
  title:
    "building a package: against python3-intelhex with zipfile, against the floor, by size, and beside a served app",
  async run(tools) {
    const folder = mkdtempSync(join(tmpdir(), "trimwright-bench-build-"));
    try {
      const outcomes = await sideBySide(tools, folder);
      outcomes.push(...(await growth(tools, folder)));
      if (!tools.signal.aborted) outcomes.push(...(await measureRunning(tools)));
      return outcomes;
    } finally {
      rmSync(folder, { recursive: true, force: true });
    }
  },
};

export default bench;

interface Round {
  floor: number;
  bare: number;
  core: number;
  whole: number;
  pythonCore: number;
  pythonWhole: number;
}

/** The same deliverable four ways, in turns, so that a busy minute meets all of them. */
async function sideBySide({ say, signal }: BenchTools, folder: string): Promise<Outcome[]> {
  const devices = modelDevices(DEVICES);
  const path = join(folder, "bundle.zip");
  await buildModel(devices, path);
  const zip = readFileSync(path);
  const files = [...readZip(zip).values()].map((content) => Buffer.from(content));
  const job = pythonJob(devices);
  const digest = sha256Hex(imageDigests(readZip(zip)));
  say(
    `${DEVICES.toLocaleString("en")} devices, ${files.length.toLocaleString("en")} files, ${(statSync(path).size / 1e6).toFixed(1)} MB; every bundle is flushed to the disk (fsync)`,
  );
  const rounds: Round[] = [];
  for (let round = 0; round < ROUNDS && !signal.aborted; round++) {
    const floor = await warmMs(() => floorOf(files, path));
    const bare = await warmMs(() => bareFloorOf(files, zip, path));
    const whole = await warmMs(() => buildModel(devices, path));
    const core = await warmMs(() => composeModel(devices));
    const python = runPython(job, path);
    if (python.images !== digest) throw new Error("the two programs make different images");
    if (round > 0)
      rounds.push({ floor, bare, core, whole, pythonCore: python.core * 1e3, pythonWhole: python.whole * 1e3 });
  }
  const of = (name: keyof Round) => spreadOf(rounds.map((one) => one[name]));
  const ratio = (a: keyof Round, b: keyof Round) => spreadOf(rounds.map((one) => one[a] / one[b])).median;
  const names = {
    floor: "floor",
    bare: "the same, written at once",
    core: "encode, HEX, SHA-256, JSON",
    whole: "whole build",
  } as const;
  for (const name of ["floor", "bare", "core", "whole"] as const) say(`${names[name]}: ${spreadText(of(name), "ms")}`);
  say(`python3-intelhex, encode, HEX, SHA-256, JSON: ${spreadText(of("pythonCore"), "ms")}`);
  say(`python3-intelhex and zipfile, whole: ${spreadText(of("pythonWhole"), "ms")}`);
  say(`whole build against the floor that is written at once: ${ratio("whole", "bare").toPrecision(3)}`);
  return [
    { what: "build of 5,000", value: ratio("whole", "floor"), unit: "× the floor", goal: FLOOR_GOAL },
    { what: "build of 5,000", value: ratio("whole", "pythonWhole"), unit: "× Python's time", goal: PYTHON_GOAL },
    {
      what: "encode, HEX, SHA-256, JSON",
      value: ratio("core", "pythonCore"),
      unit: "× Python's time",
      goal: CORE_GOAL,
    },
  ];
}

/**
 * Median of some runs, the first of which does not count: while the Python program ran, the system took memory back from this
 * process, and to get it again takes longer here than the job.
 */
async function warmMs(work: () => unknown): Promise<number> {
  const times: number[] = [];
  for (let turn = 0; turn <= TURNS; turn++) times.push(await wallMs(work));
  return spreadOf(times.slice(1)).median;
}

/** What the manifest says of each image, one after the other. */
function imageDigests(files: ReadonlyMap<string, Uint8Array>): string {
  const { images } = JSON.parse(Buffer.from(files.get("manifest.json") as Uint8Array).toString()) as {
    images: { sha256: string }[];
  };
  return images.map((image) => image.sha256).join("");
}

/** The job as the Python program reads it: only its own arithmetic is measured, not the reading. */
function pythonJob(devices: readonly ModelDevice[]): string {
  const shared = {
    "layout.major": 1,
    "layout.minor": 0,
    "layout.patch": 0,
    "package.major": 1,
    "package.minor": 0,
    "package.patch": 0,
    "lot.code": "BENCH-LOT",
    "family.referenceTemperature": 20,
    "family.capacity": 20,
    "family.nominalOutput": 2,
  };
  const head = { lot: "BENCH-LOT", version: "1.0.0", firmware: "1.0.0", derivations: [], provenRange: [8, 42] };
  return JSON.stringify({
    fields: MODEL_LAYOUT.fields,
    shared,
    devices,
    head,
    derivation: "01999999-0000-7000-8000-000000000001",
  });
}

/** Debian's own Python, which has the package python3-intelhex. */
function runPython(job: string, path: string): { core: number; whole: number; images: string } {
  const program = join(import.meta.dirname, "build/model_job.py");
  const said = execFileSync("/usr/bin/python3", [program, path], { input: job, encoding: "utf8", maxBuffer: 1e6 });
  return JSON.parse(said);
}

/** Time by number of devices, and the exponent that it grows by: the slope of log time over log devices, least squares. */
async function growth({ say, signal }: BenchTools, folder: string): Promise<Outcome[]> {
  const points: { devices: number; ms: number }[] = [];
  for (const devices of SIZES) {
    if (signal.aborted) return [];
    const list = modelDevices(devices);
    const times: number[] = [];
    for (let round = 0; round < ROUNDS; round++)
      times.push(await wallMs(() => buildModel(list, join(folder, "grown.zip"))));
    const { median } = spreadOf(times.slice(1));
    points.push({ devices, ms: median });
    say(
      `${devices.toLocaleString("en")} devices: ${median.toFixed(0)} ms, ${((median * 1e3) / devices).toFixed(1)} µs each`,
    );
  }
  return [{ what: "growth from 500 to 50,000 devices", value: slopeOf(points), unit: "exponent", goal: EXPONENT_GOAL }];
}

function slopeOf(points: readonly { devices: number; ms: number }[]): number {
  const x = points.map((one) => Math.log(one.devices));
  const y = points.map((one) => Math.log(one.ms));
  const mean = (values: readonly number[]) => values.reduce((sum, value) => sum + value, 0) / values.length;
  const [mx, my] = [mean(x), mean(y)];
  const over = x.reduce((sum, value) => sum + (value - mx) ** 2, 0);
  return x.reduce((sum, value, i) => sum + (value - mx) * ((y[i] as number) - my), 0) / over;
}
