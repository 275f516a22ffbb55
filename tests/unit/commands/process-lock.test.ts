import { type ChildProcess, fork, spawnSync } from "node:child_process";
import { once } from "node:events";
import { existsSync, mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, beforeEach, describe, expect, it } from "vitest";
import { findHolder, type ProcessLock, tryLock, waitForLock } from "@/lib/commands/process-lock";
import { findStartTicks } from "@/lib/process-state";

const RIVAL = join(import.meta.dirname, "../../support/hold-lock.ts");
const folder = mkdtempSync(join(tmpdir(), "trimwright-lock-"));
let file = "";
let count = 0;
beforeEach(() => {
  count += 1;
  file = join(folder, `${count}`, "start.lock");
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

function take(): ProcessLock {
  const lock = tryLock(file);
  if (!("release" in lock)) throw new Error(`held by ${lock.heldBy}`);
  return lock;
}

describe("a process lock", () => {
  it("is taken once, and again after its release", () => {
    const lock = take();
    expect(tryLock(file)).toEqual({ heldBy: process.pid });
    expect(findHolder(file)).toBe(process.pid);
    lock.release();
    expect(existsSync(file)).toBe(false);
    take().release();
  });

  it("leaves nothing beside it", () => {
    take().release();
    expect(readdirSync(join(file, ".."))).toEqual([]);
  });

  it.each([
    ["ended", () => `${spawnSync("/bin/true").pid} 1`],
    ["was another one with this number", () => `${process.pid} 1`],
    ["left half a line", () => ""],
    ["wrote nonsense", () => "not a number"],
  ])("is free when its holder %s", (_how, content) => {
    take().release();
    writeFileSync(file, content());
    expect(findHolder(file)).toBeUndefined();
    const lock = take();
    expect(readFileSync(file, "utf8")).toBe(`${process.pid} ${findStartTicks(process.pid)}`);
    lock.release();
  });

  it("of another one is not released by a late release of ours", () => {
    const lock = take();
    writeFileSync(file, "1 1");
    lock.release();
    expect(existsSync(file)).toBe(true);
  });

  it("is waited for until it is free, or until the signal", async () => {
    const lock = take();
    const waiting = waitForLock(file);
    setTimeout(() => lock.release(), 150);
    (await waiting).release();
    take();
    await expect(waitForLock(file, AbortSignal.timeout(150))).rejects.toMatchObject({ name: "AbortError" });
  });

  it("goes to one of many processes that come at once upon a dead one's", { timeout: 60_000 }, async () => {
    take().release();
    writeFileSync(file, `${spawnSync("/bin/true").pid} 1`);
    const rivals = Array.from({ length: 6 }, () => fork(RIVAL, [file], { execArgv: ["--import", "tsx"] }));
    await Promise.all(rivals.map(said));
    const outcomes = rivals.map(said);
    for (const rival of rivals) rival.send("go");
    expect((await Promise.all(outcomes)).sort()).toEqual(["held", "held", "held", "held", "held", "taken"]);
    for (const rival of rivals) rival.disconnect();
  });
});

async function said(rival: ChildProcess): Promise<unknown> {
  const [message] = await once(rival, "message");
  return message;
}
