/** A bundle as whoever received it handles it: unpacked by unzip, checked by the commands of its own VERIFY.txt. */
import { execFileSync } from "node:child_process";
import { mkdirSync, readFileSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { inFolder, runTool } from "./programs";

/** Unpacks a bundle with unzip for the duration of `use`. */
export async function unpacked<T>(zip: Uint8Array, use: (folder: string) => T | Promise<T>): Promise<T> {
  return inFolder((folder) => {
    writeFileSync(join(folder, "bundle.zip"), zip);
    mkdirSync(join(folder, "bundle"));
    runTool("unzip", ["-q", "../bundle.zip"], undefined, join(folder, "bundle"));
    return use(join(folder, "bundle"));
  });
}

/** Commands of VERIFY.txt, taken from its text as a person would: the indented lines. */
export function commandsOf(text: string): string[] {
  return text
    .split("\n")
    .filter((line) => line.startsWith("     "))
    .map((line) => line.trim());
}

/** The commands of the folder's VERIFY.txt that fail, each run by a shell on its own. */
export function failingCommands(folder: string, shell = "/bin/sh"): string[] {
  const commands = commandsOf(readFileSync(join(folder, "VERIFY.txt"), "utf8"));
  return commands.filter((command) => !passes(command, folder, shell));
}

function passes(command: string, folder: string, shell: string): boolean {
  try {
    execFileSync(shell, ["-c", command], { cwd: folder, stdio: "pipe" });
    return true;
  } catch (error) {
    if (typeof (error as { status?: unknown }).status === "number") return false;
    throw error;
  }
}
