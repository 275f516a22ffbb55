import { parse } from "csv-parse/sync";
import type { Bench } from "@/lib/commands/bench";
import { addDevices } from "@/lib/services/lots/add-devices";
import { addLot } from "@/lib/services/lots/add-lot";
import { PASSWORD } from "../support/people";
import { publishFamily } from "../support/scenario/family-lot";
import { type BenchApi, withBenchApi } from "./bench-api";
import { type BigLot, makeBigLot } from "./big-lot";
import { spreadOf, spreadText, wallMs } from "./measure";

const DEVICES = 5_000;
/** The first warms up and does not count. */
const ROUNDS = 8;
const GOAL = 5;

const bench: Bench = {
  title: `the four runs of ${DEVICES.toLocaleString("en")} devices through POST /lots/{code}/runs, against csv-parse alone on the same bytes`,
  async run({ say, signal }) {
    const ratios = await withBenchApi(async (api) => {
      const people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
      await publishFamily(people, makeBigLot("F", 20).family.document);
      const measured: number[] = [];
      for (let round = 0; round < ROUNDS && !signal.aborted; round++) {
        const lot = await addBigLot(api, `BENCH-${round}`);
        const [parsing, uploading] = await measureRound(api, lot, round % 2 === 0);
        const ratio = uploading / parsing;
        const size = lot.runs.reduce((sum, run) => sum + run.bytes.length, 0);
        const note = round === 0 ? ", warming up" : "";
        say(
          `${(size / 1e6).toFixed(1)} MB: csv-parse ${parsing.toFixed(0)} ms, upload ${uploading.toFixed(0)} ms, ratio ${ratio.toFixed(2)}${note}`,
        );
        if (round > 0) measured.push(ratio);
      }
      return measured;
    });
    if (ratios.length === 0) return [];
    say(spreadText(spreadOf(ratios), "× csv-parse alone; the database does not wait for the disk (fsync off)"));
    return [{ what: "upload", value: spreadOf(ratios).median, unit: "× csv-parse alone", goal: GOAL }];
  },
};

export default bench;

async function addBigLot(api: BenchApi, code: string): Promise<BigLot> {
  const lot = makeBigLot(code, DEVICES);
  const engineer = api.ctx("engineer");
  await addLot(engineer, { code, family: lot.family.document.code, firmware: "2.3.0" });
  await addDevices(engineer, { lot: code, serials: lot.serials });
  return lot;
}

/** @returns milliseconds of parsing alone and of the uploads, either of them first. */
async function measureRound(api: BenchApi, lot: BigLot, parsingFirst: boolean): Promise<[number, number]> {
  const parsing = () => wallMs(() => lot.runs.map(({ bytes }) => parse(bytes, { bom: true }).length));
  const uploading = () => wallMs(() => uploadAll(api, lot));
  if (parsingFirst) return [await parsing(), await uploading()];
  const first = await uploading();
  return [await parsing(), first];
}

async function uploadAll(api: BenchApi, { code, runs }: BigLot): Promise<void> {
  for (const { purpose, bytes } of runs) {
    const { status, body } = await api.call("POST", `/lots/${code}/runs`, {
      as: "engineer",
      body: bytes,
      headers: { "content-type": "text/csv" },
      query: { purpose },
    });
    if (status !== 201) throw new Error(`The upload was refused: ${JSON.stringify(body).slice(0, 500)}`);
  }
}
