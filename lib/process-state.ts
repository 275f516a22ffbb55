/** What the system knows about a process, as far as pid files and locks need it. Linux only: read from /proc. */
import { readFileSync } from "node:fs";

/** Fields of /proc/PID/stat behind the command's closing bracket: state is the first, the start time the twentieth. */
function statFields(pid: number): string[] | undefined {
  try {
    const text = readFileSync(`/proc/${pid}/stat`, "utf8");
    return text.slice(text.lastIndexOf(")") + 2).split(" ");
  } catch {
    return undefined; // no such process, or one that ended while it was read
  }
}

/** Whether the process still runs. A zombie is gone: it holds no port and no file, only its number. */
export function isProcessAlive(pid: number): boolean {
  const state = statFields(pid)?.[0];
  return state !== undefined && state !== "Z" && state !== "X";
}

/** Start of the process in clock ticks after boot, or undefined; tells a process from a later one with its number. */
export function findStartTicks(pid: number): string | undefined {
  return statFields(pid)?.[19];
}
