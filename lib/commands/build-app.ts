/** The built app: made anew only when a file that goes into it changed. */
import { createHash } from "node:crypto";
import { existsSync, readdirSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { join, relative } from "node:path";
import { CHECKOUT, PROGRAMS } from "@/lib/commands/checkout";
import { findHolder, type ProcessLock, tryLock, waitForLock } from "@/lib/commands/process-lock";
import { runToEnd } from "@/lib/commands/run-tool";
import { actionsKey, childEnv, env } from "@/lib/env";
import { AppError } from "@/lib/errors";

const SOURCE_FOLDERS = ["app", "lib", "schemas", "builders", "db", "migrations", "public"];
/** Command-line programs; nothing of them is in the pages. */
const NOT_BUILT = new Set(["lib/commands", "lib/demo"]);
const SOURCE_FILES = /^(proxy|instrumentation|[a-z-]+\.config)\.(ts|mjs)$|^(package-lock|package|tsconfig)\.json$/;
const HASH_FILE = "source-hash";

/** Folder with a file for each start that serves a build: a build anew would take the pages from under it. */
const servedFolder = () => join(CHECKOUT, ".local", `served-${env().distDir.replaceAll("/", "-")}`);

/** Marks the built app as served by this process. */
export function markServed(): ProcessLock {
  const mark = tryLock(join(servedFolder(), String(process.pid)));
  return "release" in mark ? mark : { release: () => undefined };
}

/**
 * Builds the app unless the last build was made from the same files.
 * @returns whether it built.
 * @throws AppError `app.build_failed`, the builder's output has then been printed; `app.build_served` {pid} while another
 * process serves a build of other files.
 */
export async function ensureBuild(options: { signal?: AbortSignal; say: (line: string) => void }): Promise<boolean> {
  const distDir = join(CHECKOUT, env().distDir);
  const lock = await waitForLock(
    join(CHECKOUT, ".local", `build-${env().distDir.replaceAll("/", "-")}.lock`),
    options.signal,
  );
  try {
    const hash = sourceHash(CHECKOUT);
    const hashFile = join(distDir, HASH_FILE);
    if (existsSync(hashFile) && readFileSync(hashFile, "utf8") === hash) return false;
    assertNotServed();
    options.say("Building the app (about a minute) …");
    rmSync(hashFile, { force: true }); // a build cut short is no build of the files it names
    const result = await runToEnd(process.execPath, [PROGRAMS.next, "build"], {
      cwd: CHECKOUT,
      signal: options.signal,
      env: childEnv({
        NODE_ENV: "production",
        NEXT_TELEMETRY_DISABLED: "1",
        NEXT_SERVER_ACTIONS_ENCRYPTION_KEY: actionsKey(),
        TRIMWRIGHT_OWNER_URL: undefined,
      }),
    });
    if (result.code !== 0) {
      console.error(`${result.stdout}\n${result.stderr}`);
      const full = /ENOSPC|no space left/i.test(result.stderr);
      throw new AppError("app.build_failed", {
        message: full ? "Disk full while building the app" : "The app could not be built; see above",
      });
    }
    writeFileSync(hashFile, hash);
    return true;
  } finally {
    lock.release();
  }
}

function assertNotServed(): void {
  const folder = servedFolder();
  const names = existsSync(folder) ? readdirSync(folder) : [];
  const pid = names.map((name) => findHolder(join(folder, name))).find((holder) => holder !== undefined);
  if (pid === undefined) return;
  throw new AppError("app.build_served", {
    pid,
    message: `The sources changed, but process ${pid} still serves the app built before; stop it first`,
  });
}

/** SHA-256 over the names and bytes of every file that can change the built app, and over Node's major version. */
export function sourceHash(checkout: string): string {
  const top = readdirSync(checkout).filter((name) => SOURCE_FILES.test(name));
  const files = [...top, ...SOURCE_FOLDERS.flatMap((folder) => listFiles(checkout, folder))].sort();
  const hash = createHash("sha256").update(process.version.split(".")[0] ?? "");
  for (const file of files) hash.update(`\0${file}\0`).update(readFileSync(join(checkout, file)));
  return hash.digest("hex");
}

function listFiles(checkout: string, folder: string): string[] {
  const path = join(checkout, folder);
  if (NOT_BUILT.has(folder) || !existsSync(path)) return [];
  return readdirSync(path, { withFileTypes: true }).flatMap((entry) => {
    const name = relative(checkout, join(path, entry.name));
    return entry.isDirectory() ? listFiles(checkout, name) : [name];
  });
}
