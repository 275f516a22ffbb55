import { once } from "node:events";
import { existsSync, readFileSync } from "node:fs";
import { createServer } from "node:net";
import { join } from "node:path";
import { beforeAll, describe, expect, it } from "vitest";
import {
  beginStart,
  databaseProcess,
  eventually,
  healthOf,
  killOutright,
  makeHome,
  openStart,
  processesOf,
  type RunningStart,
  servedProcess,
} from "../support/running-start";

describe("a running start", () => {
  const home = makeHome();
  let start: RunningStart;
  beforeAll(async () => {
    start = await openStart({ home, npm: true });
  });

  const isHealthy = async () => (await healthOf(start))?.status === 200;

  it("says in one line where it serves, and is healthy", async () => {
    expect(start.output().match(/^ready .*$/gm)).toEqual([`ready http://127.0.0.1:${start.port}`]);
    expect(await healthOf(start)).toMatchObject({ status: 200, body: { status: "ok", database: "ok" } });
  });

  it("without demo data, prints a link with which the first admin chooses a password", async () => {
    const link = /^ {2}(http:\S+)$/m.exec(start.output())?.[1] ?? "";
    expect(link).toMatch(new RegExp(`^http://127\\.0\\.0\\.1:${start.port}/\\S{20,}$`));
    const page = await fetch(link);
    expect(page.status).toBe(200);
    expect(start.output()).not.toContain("marram.example");
  });

  it("refuses a second start with its home in one line, and goes on", async () => {
    const second = await beginStart({ home });
    expect(await second.ended()).toBe(1);
    const holder = /process (\d+)/.exec(second.output())?.[1];
    expect(second.output()).toBe(
      `trimwright: Trimwright is already running with ${home} (process ${holder}); stop it first or set TRIMWRIGHT_HOME\n`,
    );
    expect(await isHealthy()).toBe(true);
  });

  it("refuses a start on its port in one line, and the other leaves no database behind", async () => {
    const other = makeHome();
    const second = await beginStart({ home: other, port: start.port });
    expect(await second.ended()).toBe(1);
    expect(second.output()).toMatch(/^trimwright: Port \d+ on 127\.0\.0\.1 cannot be used, .+ PORT=3001 npm start\n$/);
    expect(processesOf(other)).toEqual([]);
    expect(await isHealthy()).toBe(true);
  });

  it("brings its database back after a kill, at the same address", async () => {
    const before = databaseProcess(home);
    killOutright(before);
    await start.untilPrinted(/^The database had ended and was started again\.$/);
    await eventually(isHealthy);
    expect(databaseProcess(home)).not.toBe(before);
  });

  it.each(["web", "worker"] as const)("starts the %s process again after a kill", async (which) => {
    const before = servedProcess(home, which);
    killOutright(before);
    await start.untilPrinted(new RegExp(`^The ${which} process ended \\(SIGKILL\\); starting it again\\. Its log: /`));
    await eventually(() => ![undefined, before].includes(servedProcess(home, which)));
    await eventually(isHealthy);
  });

  it("gives the app and the worker the app's role and not the owner's", () => {
    for (const which of ["web", "worker"] as const) {
      const settings = readFileSync(`/proc/${servedProcess(home, which)}/environ`, "utf8");
      expect(settings).toContain("DATABASE_URL=postgresql://trimwright_app:");
      expect(settings).not.toContain("trimwright_owner");
    }
  });

  it("ends the app, the worker and the database at Ctrl-C", async () => {
    start.interrupt();
    await start.ended();
    expect(start.output()).toMatch(/\nStopping …\n(.*\n)*Stopped\.\n/);
    expect(processesOf(home)).toEqual([]);
    expect(existsSync(join(home, "start.lock"))).toBe(false);
    expect(readFileSync(join(home, "database.log"), "utf8").trimEnd()).toMatch(/database system is shut down$/);
  });

  it("starts again with what it had, and makes nothing anew", async () => {
    const again = await openStart({ home, port: start.port });
    expect(again.output()).not.toMatch(/Making tables|Building|Installing/);
    again.kill("SIGTERM");
    expect(await again.ended()).toBe(0);
    expect(processesOf(home)).toEqual([]);
  });
});

describe("a start on a port that another program has", () => {
  it("says so before it does anything", async () => {
    const other = createServer().listen(0, "0.0.0.0");
    await once(other, "listening");
    const home = makeHome();
    const start = await beginStart({ home, port: (other.address() as { port: number }).port });
    expect(await start.ended()).toBe(1);
    expect(start.output()).toMatch(/^trimwright: Port \d+ .+\n$/);
    expect(existsSync(join(home, "database"))).toBe(false);
    other.close();
  });
});
