/** Debian's packages: installed as root, or unpacked into a private folder by anybody else. */
import { existsSync, mkdirSync, readFileSync, renameSync, rmSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { setTimeout as delay } from "node:timers/promises";
import { privatePackagesFolder } from "@/db/postgres-binaries";
import { runTool, type ToolOptions } from "@/lib/commands/run-tool";
import { childEnv } from "@/lib/env";
import { AppError } from "@/lib/errors";

const CLUSTER_SETTINGS = "/etc/postgresql-common/createcluster.conf";
const APT_GET = "/usr/bin/apt-get";
const LOCK_WAIT_MS = 300_000;
const LOCK_LOOK_MS = 1_000;

export interface InstallOptions {
  home: string;
  signal?: AbortSignal;
  /** Path of apt-get, where a test puts another one in its place. */
  aptGet?: string;
}

/** Whether this machine has Debian's packages at all. */
export function isDebian({ aptGet = APT_GET }: Pick<InstallOptions, "aptGet"> = {}): boolean {
  return existsSync(aptGet);
}

/** Whether this process may install packages for the whole machine. */
export function mayInstall(): boolean {
  return process.getuid?.() === 0 && isDebian();
}

/**
 * Installs packages with apt-get. Needs root.
 * @throws AppError `packages.not_installed` {packages} with apt-get's reason.
 */
export async function installPackages(packages: string[], options: InstallOptions): Promise<void> {
  const env = childEnv({ DEBIAN_FRONTEND: "noninteractive" });
  const { aptGet = APT_GET, signal } = options;
  const isDebians = aptGet === APT_GET; // a test's apt-get installs nothing, so nothing of the machine is set for it
  if (isDebians && packages.some((name) => name.startsWith("postgresql"))) keepDebianFromMakingCluster();
  const flags = ["-y", "-qq", "--no-install-recommends", "-o", "Dpkg::Options::=--force-confold"];
  try {
    await runAptGet(aptGet, ["update", "-qq"], { env, signal });
    await runAptGet(aptGet, ["install", ...flags, ...packages], { env, signal });
  } catch (error) {
    throw notInstalled(packages, error);
  }
}

/** Waits while another apt-get works: a fresh machine often brings itself up to date first. */
async function runAptGet(aptGet: string, args: string[], options: ToolOptions): Promise<void> {
  const deadline = Date.now() + LOCK_WAIT_MS;
  for (;;) {
    try {
      await runTool(aptGet, args, options);
      return;
    } catch (error) {
      const isLocked = error instanceof AppError && /Could not get lock/.test(error.message);
      if (!isLocked || Date.now() > deadline) throw error;
      await delay(LOCK_LOOK_MS, undefined, { signal: options.signal });
    }
  }
}

/** Otherwise the package starts a server on port 5432 that nobody asked for. An existing file is the admin's. */
function keepDebianFromMakingCluster(): void {
  if (existsSync(CLUSTER_SETTINGS)) return;
  mkdirSync("/etc/postgresql-common", { recursive: true });
  writeFileSync(CLUSTER_SETTINGS, "create_main_cluster = false\n");
}

/**
 * Downloads packages with whatever they need and this machine lacks, and unpacks them below the home. Needs no root:
 * apt-get works on lists and archives of its own there.
 * @throws AppError `packages.not_installed` {packages} with apt-get's reason.
 */
export async function unpackPackages(packages: string[], options: InstallOptions): Promise<void> {
  const { aptGet = APT_GET } = options;
  const root = privatePackagesFolder(options.home);
  const unfinished = `${root}.unfinished`;
  const apt = join(options.home, "apt");
  for (const folder of ["lists/partial", "cache/archives/partial", "downloads"]) {
    mkdirSync(join(apt, folder), { recursive: true });
  }
  const dirs = ["-o", `Dir::State::lists=${join(apt, "lists")}`, "-o", `Dir::Cache=${join(apt, "cache")}`];
  const downloads = { cwd: join(apt, "downloads"), signal: options.signal };
  try {
    await runTool(aptGet, [...dirs, "update", "-qq"], downloads);
    const plan = await runTool(
      aptGet,
      [...dirs, "install", "-s", "-q", "--no-install-recommends", ...packages],
      downloads,
    );
    const missing = plan.split("\n").flatMap((line) => /^Inst (\S+)/.exec(line)?.[1] ?? []);
    await runTool(aptGet, [...dirs, "download", "-q", ...missing], downloads);
    rmSync(unfinished, { recursive: true, force: true });
    mkdirSync(unfinished, { recursive: true });
    await runTool(
      "/bin/sh",
      ["-c", `for f in *.deb; do dpkg -x "$f" "$1" || exit 1; done`, "sh", unfinished],
      downloads,
    );
    // Under its name only when it is whole: programs without their libraries would look installed.
    rmSync(root, { recursive: true, force: true });
    renameSync(unfinished, root);
  } catch (error) {
    throw notInstalled(packages, error);
  } finally {
    for (const folder of [apt, unfinished]) rmSync(folder, { recursive: true, force: true });
  }
}

function notInstalled(packages: string[], cause: unknown): unknown {
  if (!(cause instanceof AppError) || cause.code === "command.stopped") return cause;
  const message = `Debian's ${packages.join(", ")} could not be had: ${cause.message}`;
  return new AppError("packages.not_installed", { packages, message }, { cause });
}

/** Debian's name and version, for messages. */
export function systemName(): string {
  if (!existsSync("/etc/os-release")) return "this system";
  return /^PRETTY_NAME="?([^"\n]+)/m.exec(readFileSync("/etc/os-release", "utf8"))?.[1] ?? "this system";
}
