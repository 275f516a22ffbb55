/** A real worker process that is killed outright amid a build, and the next one that takes the build up again. */
import { type ChildProcess, spawn } from "node:child_process";
import { once } from "node:events";
import { sql } from "kysely";
import { afterAll, beforeAll, expect, it } from "vitest";
import { CHECKOUT, PROGRAMS } from "@/lib/commands/checkout";
import { childEnv, env } from "@/lib/env";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD } from "../support/people";
import { eventually } from "../support/running-start";
import { arrangeDerived, type DerivedLot } from "../support/scenario/derived";
import { buildGolden } from "../support/scenario/packaged";

let api: TestApi;
let lot: DerivedLot;
const workers: ChildProcess[] = [];

beforeAll(async () => {
  api = await openTestApi();
  const people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  lot = await arrangeDerived(people);
  await api.runJobs();
});

afterAll(async () => {
  for (const worker of workers) {
    worker.kill("SIGKILL");
    if (worker.exitCode === null && worker.signalCode === null) await once(worker, "exit");
  }
});

function startWorker(): ChildProcess {
  const { databaseUrl, home } = env();
  const settings = childEnv({ DATABASE_URL: databaseUrl, TRIMWRIGHT_HOME: home, NODE_ENV: "production" });
  const worker = spawn(process.execPath, [PROGRAMS.bootstrap, "worker"], {
    cwd: CHECKOUT,
    env: settings,
    stdio: ["ignore", "ignore", "inherit"],
  });
  workers.push(worker);
  return worker;
}

const get = async (id: string) => (await api.call("GET", `/packages/${id}`, { as: "engineer" })).body;
const imagesOf = async (id: string) =>
  api.db.selectFrom("image").select(["serial", "hexSha256"]).where("packageId", "=", id).orderBy("serial").execute();

it("a build whose worker is killed while it stores is taken up again within seconds, with the same bytes", async () => {
  const { body } = await api.call("POST", `/lots/${lot.lot}/packages`, { as: "engineer", body: { layout: "1.0.0" } });
  const { id } = body;
  const worker = startWorker();
  // Whoever stores a package waits for its lot: the worker is caught there.
  await api.db.transaction().execute(async (trx) => {
    await sql`select 1 from lot where code = ${lot.lot} for update`.execute(trx);
    await eventually(async () => (await get(id)).progress.step === "storing");
    worker.kill("SIGKILL");
    await once(worker, "exit");
  });
  expect(await get(id)).toMatchObject({ state: "building", digest: null, checks: [] });
  expect(await imagesOf(id)).toEqual([]);
  const other = (await api.call("POST", `/lots/${lot.lot}/packages`, { as: "engineer", body: { layout: "1.0.0" } }))
    .body;
  await sql`update pgboss.job set state = 'failed' where data ->> 'packageId' = ${other.id}`.execute(api.db);

  startWorker();
  await eventually(async () => (await get(id)).state === "draft");
  await eventually(async () => (await get(other.id)).failure?.code === "job.given_up");
  await api.call("POST", `/packages/${id}/rebuild`, { as: "engineer" });
  await eventually(async () => (await get(id)).rebuild?.same === true);
  const { engineer, reviewer } = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer") };
  const next = await buildGolden({ engineer, reviewer, password: PASSWORD }, lot, { step: "major" });
  expect((await imagesOf(id)).map((one) => one.serial)).toEqual((await imagesOf(next.id)).map((one) => one.serial));
}, 180_000);
