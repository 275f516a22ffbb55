/** What a data folder's pid file and the system's processes say about the server that works in the folder. */
import { existsSync, readdirSync, readFileSync, readlinkSync, rmSync } from "node:fs";
import { join } from "node:path";
import { setTimeout as delay } from "node:timers/promises";
import { AppError } from "@/lib/errors";
import { isProcessAlive } from "@/lib/process-state";

const ORPHANS_GONE_WITHIN_MS = 10_000;

/** Pid and port from the folder's pid file, if that process still runs. */
export function findRunningServer(dataDir: string): { pid: number; port: number } | undefined {
  const file = join(dataDir, "postmaster.pid");
  if (!existsSync(file)) return undefined;
  const lines = readFileSync(file, "utf8").split("\n");
  const pid = Number(lines[0]);
  const isOurs = Number.isInteger(pid) && pid > 0 && isProcessAlive(pid) && isPostgres(pid);
  return isOurs ? { pid, port: Number(lines[3]) } : undefined;
}

/**
 * Removes the pid file of a server that is gone: a zombie's number, or one in use again, would block the next start. The
 * file also guards the data against sessions that outlive their server, so those are waited for first.
 * @throws AppError `database.start_failed` when such sessions do not end.
 */
export async function clearStalePidFile(dataDir: string): Promise<void> {
  const file = join(dataDir, "postmaster.pid");
  if (!existsSync(file)) return;
  const deadline = Date.now() + ORPHANS_GONE_WITHIN_MS;
  while (isFolderInUse(dataDir)) {
    if (Date.now() > deadline) {
      throw new AppError("database.start_failed", { message: `Sessions of an ended server still use ${dataDir}` });
    }
    await delay(50);
  }
  rmSync(file, { force: true });
}

/** Whether a process works in the folder; every process of a PostgreSQL server has its data folder as its own. */
function isFolderInUse(folder: string): boolean {
  return readdirSync("/proc")
    .filter((name) => /^\d+$/.test(name) && isProcessAlive(Number(name)))
    .some((name) => workingFolderOf(name) === folder);
}

function workingFolderOf(pid: string): string | undefined {
  try {
    return readlinkSync(`/proc/${pid}/cwd`);
  } catch {
    return undefined; // ended meanwhile, or another user's, who cannot be using our folder
  }
}

/** A number that another program got since is not our server. */
function isPostgres(pid: number): boolean {
  try {
    return readFileSync(`/proc/${pid}/comm`, "utf8").trim() === "postgres";
  } catch {
    return false; // ended between the two looks
  }
}
