import { monitorEventLoopDelay } from "node:perf_hooks";
import { setTimeout as sleep } from "node:timers/promises";
import type { Bench } from "@/lib/commands/bench";
import { drawDevice } from "@/lib/demo/device-model";
import { benchFamily } from "@/lib/demo/families";
import { seededRandom } from "@/lib/demo/random";
import { writeRunCsv } from "@/lib/demo/readings-csv";
import { numberSerials } from "@/lib/domain/serials";
import { addLot } from "@/lib/services/lots/add-lot";
import { PASSWORD } from "../support/people";
import { publishFamily } from "../support/scenario/family-lot";
import { type BenchApi, withBenchApi } from "./bench-api";
import { spreadOf, spreadText } from "./measure";

const DEVICES = 50_000;
const ROUNDS = 3;
const GOAL_MS = 100;
/** What a client's connection brings at a time. */
const CHUNK_BYTES = 64 * 1024;
/** How often somebody else asks for the list of lots meanwhile, and how long everything may come to rest before, ms. */
const [ASKED_EVERY_MS, REST_MS] = [50, 300];

interface Upload {
  what: string;
  path: string;
  query?: Record<string, string | number | boolean>;
  contentType: string;
  bytes: Buffer;
}

const bench: Bench = {
  title: `longest hold of the event loop by files of a lot of ${DEVICES.toLocaleString("en")} devices, and how long others wait for a list`,
  async run({ say, signal }) {
    const holds = new Map<string, number[]>();
    await withBenchApi(async (api) => {
      const people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
      await publishFamily(people, benchFamily.document);
      for (let round = 1; round <= ROUNDS && !signal.aborted; round++) {
        const lot = `HOLD-${round}`;
        await addLot(people.engineer, { code: lot, family: benchFamily.document.code, firmware: "2.3.0" });
        for (const upload of uploadsOf(lot)) {
          const { maxMs, p99Ms, waitMs } = await measureHold(api, lot, upload);
          const figures = `longest hold ${maxMs.toFixed(0)} ms, p99 ${p99Ms.toFixed(0)} ms, longest wait for a list ${waitMs.toFixed(0)} ms`;
          say(`${upload.what}, ${(upload.bytes.length / 1e6).toFixed(1)} MB: ${figures}`);
          holds.set(upload.what, [...(holds.get(upload.what) ?? []), maxMs]);
        }
      }
    });
    return [...holds].map(([what, all]) => {
      say(spreadText(spreadOf(all), `ms, ${what}`));
      return { what: `hold, ${what}`, value: spreadOf(all).median, unit: "ms longest hold", goal: GOAL_MS };
    });
  },
};

export default bench;

/** Devices, what was read of them, and coefficients found elsewhere, in the order in which a lot gets them. */
function uploadsOf(lot: string): Upload[] {
  const { document, parameters } = benchFamily;
  const { temperatureMinC, referenceC, capacityKg } = document;
  const random = seededRandom(lot.charCodeAt(lot.length - 1));
  const serials = numberSerials({ prefix: `${lot}-`, from: 1, count: DEVICES, digits: 5 });
  const devices = serials.map((serial) => drawDevice(random, parameters, serial));
  const temperaturesC = [temperatureMinC, referenceC + 1.5];
  const plan = { purpose: "sample", devices, temperaturesC, startedAt: new Date("2026-09-14T06:00:00Z") } as const;
  const rows = serials.map((serial) =>
    [serial, -232, 0.1246, random.normal(0, 0.01), random.normal(0, 8e-6), random.normal(1, 0.003), -4e-4].join(","),
  );
  const coefficients = ["serial,tempOffset,tempSlope,zero,zeroTc,gain,gainTc", ...rows].join("\n");
  const csv = { contentType: "text/csv" };
  const base = { ...csv, path: "coefficients", bytes: Buffer.from(coefficients) };
  const query = { referenceC, capacityKg };
  return [
    {
      what: "adding devices",
      path: "devices",
      contentType: "application/json",
      bytes: Buffer.from(JSON.stringify({ serials })),
    },
    {
      ...csv,
      what: "a run of 8 readings each",
      path: "runs",
      query: { purpose: "sample" },
      bytes: writeRunCsv(plan, { family: document, parameters, random }),
    },
    { ...base, what: "previewing coefficients", query: { ...query, preview: true } },
    { ...base, what: "importing coefficients", query },
  ];
}

async function measureHold(api: BenchApi, lot: string, upload: Upload) {
  await sleep(REST_MS);
  const delays = monitorEventLoopDelay({ resolution: 1 });
  const asking = askForLots(api);
  delays.enable();
  const { status, body } = await api.call("POST", `/lots/${lot}/${upload.path}`, {
    as: "engineer",
    body: streamOf(upload.bytes),
    headers: { "content-type": upload.contentType, "content-length": String(upload.bytes.length) },
    query: upload.query,
  });
  // The timer that the histogram goes by has to come round once more.
  await sleep(2);
  delays.disable();
  const waitMs = await asking.stop();
  if (status >= 300) throw new Error(`${upload.what} was refused: ${JSON.stringify(body).slice(0, 500)}`);
  return { maxMs: delays.max / 1e6, p99Ms: delays.percentile(99) / 1e6, waitMs };
}

/** Asks for the list of lots again and again, as pages of other people do. */
function askForLots(api: BenchApi) {
  let going = true;
  const asking = (async () => {
    let longestMs = 0;
    while (going) {
      const from = performance.now();
      await api.call("GET", "/lots", { as: "auditor" });
      longestMs = Math.max(longestMs, performance.now() - from);
      await sleep(ASKED_EVERY_MS);
    }
    return longestMs;
  })();
  return {
    stop: () => {
      going = false;
      return asking;
    },
  };
}

function streamOf(bytes: Buffer): ReadableStream<Uint8Array> {
  let sent = 0;
  return new ReadableStream<Uint8Array>({
    pull: (controller) => {
      if (sent >= bytes.length) return controller.close();
      controller.enqueue(bytes.subarray(sent, sent + CHUNK_BYTES));
      sent += CHUNK_BYTES;
    },
  });
}
