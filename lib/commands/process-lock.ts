/** A lock that one process holds until it lets go or ends: a file with its number and start time, never a number alone. */
import { linkSync, mkdirSync, readFileSync, renameSync, rmSync, writeFileSync } from "node:fs";
import { dirname } from "node:path";
import { setTimeout as delay } from "node:timers/promises";
import { findStartTicks, isProcessAlive } from "@/lib/process-state";

export interface ProcessLock {
  release(): void;
}

/**
 * Takes the lock if no living process holds it.
 * @returns the lock, or the holder's process number.
 */
export function tryLock(file: string): ProcessLock | { heldBy: number } {
  mkdirSync(dirname(file), { recursive: true });
  const mine = `${process.pid} ${findStartTicks(process.pid)}`;
  const draft = `${file}.${process.pid}`;
  writeFileSync(draft, mine);
  try {
    // A link appears whole or not at all, so that nobody reads a half-written lock.
    for (let attempt = 0; attempt < 5; attempt += 1) {
      if (linkTo(draft, file)) return { release: () => releaseOwn(file, mine) };
      const holder = findHolder(file);
      if (holder !== undefined) return { heldBy: holder };
      setAside(file);
    }
    return { heldBy: findHolder(file) ?? 0 };
  } finally {
    rmSync(draft, { force: true });
  }
}

/** Waits for the lock. @param signal gives up the wait. */
export async function waitForLock(file: string, signal?: AbortSignal): Promise<ProcessLock> {
  for (;;) {
    const result = tryLock(file);
    if ("release" in result) return result;
    await delay(100, undefined, { signal });
  }
}

/** The living process that holds a lock file, if any. */
export function findHolder(file: string): number | undefined {
  const text = readIfThere(file);
  if (text === undefined) return undefined;
  const [pid, ticks] = text.split(" ");
  const number = Number(pid);
  return isProcessAlive(number) && findStartTicks(number) === ticks ? number : undefined;
}

function linkTo(existing: string, file: string): boolean {
  try {
    linkSync(existing, file);
    return true;
  } catch (error) {
    if ((error as NodeJS.ErrnoException).code === "EEXIST") return false;
    throw error;
  }
}

/** Moves a dead holder's file away before deleting it: of two processes that do so, only one moves the stale file. */
function setAside(file: string): void {
  const aside = `${file}.stale-${process.pid}`;
  try {
    renameSync(file, aside);
  } catch (error) {
    if ((error as NodeJS.ErrnoException).code === "ENOENT") return;
    throw error;
  }
  // Between reading and moving, another process may have taken the lock; then it is put back.
  if (findHolder(aside) !== undefined) linkTo(aside, file);
  rmSync(aside, { force: true });
}

function releaseOwn(file: string, mine: string): void {
  if (readIfThere(file) === mine) rmSync(file, { force: true });
}

function readIfThere(file: string): string | undefined {
  try {
    return readFileSync(file, "utf8");
  } catch (error) {
    if ((error as NodeJS.ErrnoException).code === "ENOENT") return undefined;
    throw error;
  }
}
