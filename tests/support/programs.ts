import { execFileSync, spawnSync } from "node:child_process";
import { mkdtempSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";

/** Debian's Python, which has the packages intelhex and crccheck; another one in the path may not. */
export const PYTHON = "/usr/bin/python3";

/** Runs an outside program; a missing program or a status other than 0 fails the test that asked. */
export function runTool(program: string, args: string[], input?: string | Uint8Array, cwd?: string): Buffer {
  return execFileSync(program, args, { input, cwd, stdio: ["pipe", "pipe", "pipe"], maxBuffer: 64 << 20 });
}

/** Runs an outside program that may refuse; a missing one fails the test that asked. */
export function tryTool(
  program: string,
  args: string[],
  cwd: string,
): { status: number; output: string; errors: string } {
  const { error, status, stdout, stderr } = spawnSync(program, args, { cwd, encoding: "utf8" });
  if (error) throw error;
  return { status: status ?? -1, output: stdout, errors: stderr };
}

/** A folder for the duration of `use`. */
export async function inFolder<T>(use: (folder: string) => T | Promise<T>): Promise<T> {
  const folder = mkdtempSync(join(tmpdir(), "trimwright-"));
  try {
    return await use(folder);
  } finally {
    rmSync(folder, { recursive: true });
  }
}
