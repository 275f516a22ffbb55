/** A build of 50,000 devices by the real worker, beside the real app, which is asked for its health all the while. */
import { setTimeout as delay } from "node:timers/promises";
import type { BenchTools, Outcome } from "@/lib/commands/bench";
import { ensureBuild } from "@/lib/commands/build-app";
import { seededRandom } from "@/lib/demo/random";
import { importCoefficients } from "@/lib/services/coefficients/import-coefficients";
import { addDevices } from "@/lib/services/lots/add-devices";
import { addLot } from "@/lib/services/lots/add-lot";
import { PASSWORD } from "../../support/people";
import { approveDerivation } from "../../support/scenario/derived";
import { publishFamily, publishLayout } from "../../support/scenario/family-lot";
import { firstGolden } from "../../support/scenario/golden";
import { approveSubmitted, submitBuilt } from "../../support/scenario/packaged";
import { type BenchApi, withBenchApi } from "../bench-api";
import { spreadOf } from "../measure";
import { callAs, p99, peakMegabytes, type Served, watchHealth, withServedApp } from "./served";

const DEVICES = 50_000;
const AT_ONCE = 10_000;
const HEALTH_GOAL_MS = 200;
/** Stated in DEVELOPERS.md. */
const WORKER_GOAL_MB = 700;
const LOT = "BENCH-50K";

/** Needs the built app: makes it first where it is not built from these sources. */
export function measureRunning({ say, signal }: BenchTools): Promise<Outcome[]> {
  return withBenchApi(async (api) => {
    await ensureBuild({ say, signal });
    const people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
    const layout = await arrangeLot(people);
    return withServedApp(async (served) => {
      const idle = await healthDuring(served, () => delay(3_000));
      let id = "";
      const from = performance.now();
      const building = await healthDuring(served, async () => {
        id = await buildThroughApp(api, served, layout);
      });
      const seconds = (performance.now() - from) / 1e3;
      const workerMb = peakMegabytes(served.worker);
      await submitBuilt(people, { id, version: "1.0.0" });
      await approveSubmitted(people, { id, version: "1.0.0" });
      const releasing = await healthDuring(served, () => releaseThroughApp(api, served, id));
      const webMb = peakMegabytes(served.web);
      say(
        `${DEVICES.toLocaleString("en")} devices: built in ${seconds.toFixed(1)} s; worker at most ${workerMb.toFixed(0)} MB, app ${webMb.toFixed(0)} MB`,
      );
      say(
        `health, median and p99: idle ${told(idle)}, building ${told(building)}, releasing and downloading ${told(releasing)} ms`,
      );
      return [
        { what: "health while 50,000 are built, p99", value: p99(building), unit: "ms", goal: HEALTH_GOAL_MS },
        {
          what: "health while 50,000 are released and downloaded, p99",
          value: p99(releasing),
          unit: "ms",
          goal: HEALTH_GOAL_MS,
        },
        { what: "worker's memory at 50,000 devices", value: workerMb, unit: "MB", goal: WORKER_GOAL_MB },
      ];
    });
  });
}

const told = (times: readonly number[]) => `${spreadOf(times).median.toFixed(0)} and ${p99(times).toFixed(0)}`;

async function healthDuring(served: Served, work: () => Promise<unknown>): Promise<number[]> {
  let done = false;
  const watching = watchHealth(served, () => done);
  try {
    await work();
  } finally {
    done = true;
  }
  return watching;
}

type People = Parameters<typeof publishFamily>[0];

/** @returns the layout's version. */
export async function arrangeLot(people: People): Promise<string> {
  const golden = firstGolden();
  const { engineer } = people;
  await publishFamily(people, golden.family);
  await publishLayout(people, golden.layout);
  await addLot(engineer, { code: LOT, family: golden.family.code, firmware: golden.firmware });
  const serials = Array.from({ length: DEVICES }, (_, i) => `B50K-${String(i + 1).padStart(5, "0")}`);
  for (let at = 0; at < DEVICES; at += AT_ONCE)
    await addDevices(engineer, { lot: LOT, serials: serials.slice(at, at + AT_ONCE) });
  const random = seededRandom(DEVICES);
  const spread = [
    [-231.9, 0.5],
    [0.1246, 2e-4],
    [-0.0139, 0.01],
    [6.9e-6, 2e-6],
    [1, 0.004],
    [-4.178e-4, 2e-6],
  ] as const;
  const rows = serials.map((serial) => [serial, ...spread.map(([mean, sd]) => random.normal(mean, sd))].join(","));
  const bytes = Buffer.from(`serial,tempOffset,tempSlope,zero,zeroTc,gain,gainTc\n${rows.join("\n")}\n`);
  const { referenceC, capacityKg } = golden.family;
  const { id } = await importCoefficients(engineer, { lot: LOT, referenceC, capacityKg, bytes });
  await approveDerivation(people, id);
  return golden.layoutVersion;
}

async function buildThroughApp(api: BenchApi, served: Served, layout: string): Promise<string> {
  const engineer = sessionOf(api, "engineer");
  const started = await callAs(served, engineer, `/lots/${LOT}/packages`, { layout });
  if (started.status !== 202) throw new Error(`the build was not started: ${await started.text()}`);
  const { id } = (await started.json()) as { id: string };
  for (;;) {
    const { state, failure } = (await (await callAs(served, engineer, `/packages/${id}`)).json()) as {
      state: string;
      failure: unknown;
    };
    if (state === "draft") return id;
    if (state !== "building") throw new Error(`the build ended as ${state}: ${JSON.stringify(failure)}`);
    await delay(500);
  }
}

/** Releases, then downloads the bundle at once, so that the app may have to make it. */
async function releaseThroughApp(api: BenchApi, served: Served, id: string): Promise<void> {
  const engineer = sessionOf(api, "engineer");
  const released = await callAs(served, engineer, `/packages/${id}/release`, { password: PASSWORD });
  if (released.status !== 200) throw new Error(`not released: ${await released.text()}`);
  const bundle = await callAs(served, engineer, `/packages/${id}/bundle`);
  if (bundle.status !== 200) throw new Error(`no bundle: ${await bundle.text()}`);
  for await (const piece of bundle.body as AsyncIterable<Uint8Array>) void piece.length;
}

function sessionOf(api: BenchApi, name: "engineer"): string {
  return (api.ctx(name).actor as { sessionId?: string }).sessionId as string;
}
