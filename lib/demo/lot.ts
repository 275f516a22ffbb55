/** A lot of the demo, taken step by step through the services as its people would. */
import type { Purpose } from "@/lib/domain/compensation/types";
import { DEMO_PASSWORD } from "@/lib/domain/demo-accounts";
import { decideDerivation } from "@/lib/services/derivations/decide-derivation";
import { getDerivationView } from "@/lib/services/derivations/get-derivation";
import { startDerivation } from "@/lib/services/derivations/start-derivation";
import { addDevices } from "@/lib/services/lots/add-devices";
import { addLot } from "@/lib/services/lots/add-lot";
import { uploadRun } from "@/lib/services/runs/upload-run";
import { drawDevice, type ModelDevice } from "./device-model";
import { DEMO_SEED, type DemoFamily } from "./families";
import { EQUIPMENT_OF } from "./ground";
import type { DemoPersonName } from "./people";
import { type Random, seededRandom } from "./random";
import { type RunPlan, writeRunCsv } from "./readings-csv";
import type { Story } from "./story";

export interface DemoLot {
  code: string;
  family: DemoFamily;
  devices: readonly ModelDevice[];
  random: Random;
  /** Ids of its runs, in the order they were uploaded. */
  runs: string[];
}

export interface LotPlan {
  code: string;
  family: DemoFamily;
  firmware: string;
  devices: number;
  /** Changes a device after it was drawn, by its place in the lot. */
  adjust?: (device: ModelDevice, index: number) => ModelDevice;
}

/** Each lot draws from its own numbers, so that changing one lot leaves the others as they were. */
function seedOf(code: string): number {
  let seed = DEMO_SEED;
  for (const character of code) seed = Math.imul(seed, 31) + character.charCodeAt(0);
  return seed;
}

/** A lot with its serials. */
export async function makeLot(story: Story, plan: LotPlan): Promise<DemoLot> {
  const random = seededRandom(seedOf(plan.code));
  const devices = Array.from({ length: plan.devices }, (_, index) => {
    const serial = `${plan.code}-${String(index + 1).padStart(5, "0")}`;
    const device = drawDevice(random, plan.family.parameters, serial);
    return plan.adjust?.(device, index) ?? device;
  });
  const engineer = story.as("engineer");
  await addLot(engineer, { code: plan.code, family: plan.family.document.code, firmware: plan.firmware });
  await addDevices(engineer, { lot: plan.code, serials: devices.map((device) => device.serial) });
  return { code: plan.code, family: plan.family, devices, random, runs: [] };
}

export interface ReadStep {
  purpose: RunPlan["purpose"];
  /** Range of the lot's devices, as `slice` takes it. */
  devices: [from: number, to?: number];
  temperaturesC: readonly number[];
  soakMinutes?: number;
  by?: DemoPersonName;
  supersedes?: { run: string; reason: string };
}

/** Takes readings on the clock's day and uploads them in the evening. @returns the run's id */
export async function readRun(story: Story, lot: DemoLot, step: ReadStep): Promise<string> {
  const startedAt = new Date(story.clock.now().getTime() - 14 * 3_600_000);
  startedAt.setUTCSeconds(0, 0);
  const plan: RunPlan = { ...step, devices: lot.devices.slice(...step.devices), startedAt };
  const { document, parameters } = lot.family;
  const bytes = writeRunCsv(plan, { family: document, parameters, random: lot.random });
  const { purpose, supersedes } = step;
  const run = await uploadRun(story.as(step.by ?? "engineer"), {
    lot: lot.code,
    purpose: purpose satisfies Purpose,
    equipment: EQUIPMENT_OF[document.code] ?? [],
    addDevices: false,
    fileName: `${lot.code}-${purpose}.csv`,
    bytes,
    ...(supersedes && { supersedes: supersedes.run, reason: supersedes.reason }),
  });
  const replaced = supersedes ? lot.runs.indexOf(supersedes.run) : -1;
  if (replaced >= 0) lot.runs.splice(replaced, 1, run.id);
  else lot.runs.push(run.id);
  return run.id;
}

/** The usual four runs: a sample, the zero and the span of all others, and a verification of some. */
export async function readPooledRuns(story: Story, lot: DemoLot, sample: number, verification: number): Promise<void> {
  const { temperatureMinC: low, temperatureMaxC: high, referenceC } = lot.family.document;
  const all = [low, referenceC + 1.5, high];
  await readRun(story, lot, { purpose: "sample", devices: [0, sample], temperaturesC: all });
  await readRun(story, lot, { purpose: "zero", devices: [sample, -verification], temperaturesC: [low, high] });
  await readRun(story, lot, { purpose: "span", devices: [sample, -verification], temperaturesC: [referenceC + 1.5] });
  await readRun(story, lot, { purpose: "verification", devices: [-verification], temperaturesC: all });
}

/** Derives from all runs of the lot. @returns the derivation's id */
export async function deriveLot(
  story: Story,
  lot: DemoLot,
  options: { method: "individual" | "pooled-gain"; order: 1 | 2; exclude?: { serial: string; reason: string }[] },
): Promise<string> {
  const { exclude = [], ...rest } = options;
  const { id } = await startDerivation(story.as("engineer"), { lot: lot.code, ...rest, exclude, runs: [...lot.runs] });
  await story.work();
  return id;
}

/** Approves a derivation's sets, with a reason for each soft finding. */
export async function approveSets(story: Story, id: string, serials?: string[]): Promise<void> {
  const reviewer = story.as("reviewer");
  const { findings } = await getDerivationView(reviewer, id);
  const soft = [...new Set(findings.filter((one) => one.severity === "soft").map((one) => one.code))];
  const acknowledge = soft.map((finding) => ({
    finding,
    reason: "Seen in the residuals; far inside the envelope for this class.",
  }));
  await decideDerivation(reviewer, { id, decision: "approve", acknowledge, serials, password: DEMO_PASSWORD });
}

/** Refuses sets of a derivation. */
export async function refuseSets(story: Story, id: string, serials: string[], reason: string): Promise<void> {
  const decision = { id, decision: "refuse", acknowledge: [], serials, reason, password: DEMO_PASSWORD } as const;
  await decideDerivation(story.as("reviewer"), { ...decision, acknowledge: [] });
}
