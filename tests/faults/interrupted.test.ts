import { existsSync } from "node:fs";
import { join } from "node:path";
import { sql } from "kysely";
import { describe, expect, it } from "vitest";
import { onServer } from "@/db/databases";
import { findRunningServer } from "@/db/pid-file";
import { OWNER_ROLE } from "@/db/roles";
import { databasePassword } from "@/lib/env";
import { isProcessAlive } from "@/lib/process-state";
import {
  beginStart,
  databaseProcess,
  eventually,
  healthOf,
  makeHome,
  openStart,
  processesOf,
  servedProcess,
} from "../support/running-start";

/** Databases of a home's server that are ours. */
async function databasesOf(home: string): Promise<string[]> {
  const { port } = findRunningServer(join(home, "database")) ?? { port: 0 };
  const url = `postgresql://${OWNER_ROLE}:${databasePassword(OWNER_ROLE, home)}@127.0.0.1:${port}/postgres`;
  return onServer(url, async (owner) => {
    const { rows } = await sql<{
      name: string;
    }>`select datname as name from pg_database where datname like 'trimwright%'`.execute(owner);
    return rows.map(({ name }) => name).sort();
  });
}

describe("a first start that is cut short", () => {
  it("by a kill amid the demo leaves no half database to the next one", async () => {
    const home = makeHome();
    const first = await beginStart({ home, env: { TRIMWRIGHT_DEMO: "1" } });
    await first.untilPrinted(/^ {2}\S/);
    first.kill("SIGKILL");
    await first.ended();
    expect(await databasesOf(home)).toEqual(["trimwright_setup"]);

    const second = await openStart({ home });
    expect(second.output()).toContain("Making tables …\n");
    expect(await databasesOf(home)).toEqual(["trimwright"]);
    expect(second.output()).toMatch(/The first admin chooses a password here, once:/);
    second.kill("SIGINT");
    expect(await second.ended()).toBe(0);
    expect(processesOf(home)).toEqual([]);
  });

  it("by Ctrl-C amid the demo ends at once, with its database", async () => {
    const home = makeHome();
    const start = await beginStart({ home, env: { TRIMWRIGHT_DEMO: "1" } });
    await start.untilPrinted(/^ {2}\S/);
    start.kill("SIGINT");
    expect(await start.ended()).toBe(130);
    expect(start.output()).toMatch(/^(Starting|Making|Filling| {2}MW).*(\n(Making|Filling| {2}MW).*)*\n$/);
    expect(processesOf(home)).toEqual([]);
    expect(existsSync(join(home, "start.lock"))).toBe(false);
  });

  it("by a kill amid making the data folder is made anew", async () => {
    const home = makeHome();
    const first = await beginStart({ home });
    await eventually(() => existsSync(join(home, "database")));
    first.kill("SIGKILL");
    await first.ended();
    await eventually(() => processesOf(home).every((pid) => pid === databaseProcess(home)));
    const second = await openStart({ home });
    expect((await healthOf(second))?.status).toBe(200);
    second.kill("SIGTERM");
    expect(await second.ended()).toBe(0);
  });
});

describe("a start that is killed while it serves", () => {
  it("takes its app and worker with it, and the next one takes the database over", async () => {
    const home = makeHome();
    const first = await openStart({ home });
    const served = (["web", "worker"] as const).map((which) => servedProcess(home, which) ?? 0);
    const database = databaseProcess(home);
    first.kill("SIGKILL");
    await first.ended();
    await eventually(() => !served.some(isProcessAlive));

    const second = await openStart({ home, port: first.port });
    expect(databaseProcess(home)).toBe(database);
    expect((await healthOf(second))?.status).toBe(200);
    second.kill("SIGTERM");
    expect(await second.ended()).toBe(0);
    expect(processesOf(home)).toEqual([]);
  });
});
