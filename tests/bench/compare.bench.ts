import type { Bench, Outcome } from "@/lib/commands/bench";
import { PASSWORD } from "../support/people";
import { type BenchApi, withBenchApi } from "./bench-api";
import { spreadOf, spreadText, wallMs } from "./measure";
import { makeTwoPackages } from "./two-packages";

const DEVICES = 50_000;
const FIRST_ROWS_MS = 1_000;
const WINDOWS = 9;

const bench: Bench = {
  title: "what differs between two packages of 50,000 devices, as the compare page asks for it",
  run: (tools) =>
    withBenchApi(async (api) => {
      const people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
      const two = await makeTwoPackages(people, "BIG", DEVICES);
      return measure(api, two, tools.say);
    }),
};

export default bench;

async function measure(
  api: BenchApi,
  query: { from: string; to: string },
  say: (line: string) => void,
): Promise<Outcome[]> {
  const get = async (path: string, more: Record<string, string | number> = {}) => {
    const { status, body } = await api.call("GET", path, { as: "auditor", query: { ...query, ...more } });
    if (status !== 200) throw new Error(`${path} answered ${status}`);
    return body;
  };
  // Loads the route's code, which a running server did long ago.
  await api.call("GET", "/compare/serials", { as: "auditor", query: { ...query, limit: 0 } });
  const first = await wallMs(() => get("/compare/serials"));
  const overview = await wallMs(() => get("/compare/overview"));
  const windows: number[] = [];
  for (let i = 0; i < WINDOWS; i++) {
    const offset = Math.round((DEVICES / WINDOWS) * i);
    windows.push(await wallMs(() => get("/compare/serials", { offset, sort: "-largest" })));
  }
  say(`any 200 rows, largest step first: ${spreadText(spreadOf(windows), "ms")}`);
  say(`figures over all serials, once for a pair of packages: ${overview.toFixed(0)} ms`);
  return [
    { what: "compare: first rows of two packages of 50,000", value: first, unit: "ms", goal: FIRST_ROWS_MS },
    { what: "compare: any 200 of 50,000 rows, by the largest step", value: spreadOf(windows).median, unit: "ms" },
  ];
}
