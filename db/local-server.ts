/**
 * A PostgreSQL server of our own: made in a folder, listening on loopback only, stopped when its user leaves.
 * PostgreSQL refuses to run as root; as root it is started under the data folder's owner.
 */
import { execFile, spawn } from "node:child_process";
import { createHash } from "node:crypto";
import {
  chownSync,
  closeSync,
  existsSync,
  mkdirSync,
  openSync,
  readFileSync,
  rmSync,
  statSync,
  writeFileSync,
} from "node:fs";
import { connect } from "node:net";
import { dirname, join } from "node:path";
import { setTimeout as delay } from "node:timers/promises";
import { promisify } from "node:util";
import { findFreePort } from "@/db/free-port";
import { clearStalePidFile, findRunningServer } from "@/db/pid-file";
import { listPostgres, type PostgresBinaries } from "@/db/postgres-binaries";
import { OWNER_ROLE } from "@/db/roles";
import { databasePassword } from "@/lib/env";
import { AppError } from "@/lib/errors";

const run = promisify(execFile);
const READY_WITHIN_MS = 60_000;

export interface LocalServer {
  port: number;
  dataDir: string;
  /** Connection of the owner to one of the server's databases. */
  urlOf(database: string, role?: string): string;
  stop(): Promise<void>;
}

export interface LocalServerOptions {
  /** Folder for the data, the log and the passwords. */
  home: string;
  /** Off only for tests: a power cut then loses the data. */
  fsync: boolean;
  maxConnections?: number;
  /** The port to listen on and no other; without one, the port of the last time or any free one. */
  port?: number;
}

/** The user that the server runs as; undefined for the user we are. */
interface Account {
  uid: number;
  gid: number;
}

/**
 * Starts the server of a home, making its data folder first when there is none, and waits until it answers. A server
 * that an earlier process left running is taken over.
 * @throws AppError `database.not_installed` without PostgreSQL, `database.version_missing` {major} when the data belong to
 * a version that is not here, `database.start_failed` {log} with the log's last line, or {port} when the port that must be
 * used is taken.
 */
export async function startLocalServer(options: LocalServerOptions): Promise<LocalServer> {
  mkdirSync(options.home, { recursive: true });
  const account = await findServerAccount();
  const dataDir = await chooseDataDir(options.home, account);
  const binaries = binariesFor(options.home, dataDir);
  const owner = account === undefined ? undefined : existsSync(dataDir) ? ownerOf(dataDir) : account;
  if (!existsSync(join(dataDir, "PG_VERSION"))) await initialise(binaries, dataDir, options.home, owner);

  const port = findRunningServer(dataDir)?.port ?? (await launchOnPort());
  await waitUntilReady(dataDir, port, options.home);
  writeFileSync(join(options.home, "database-port"), String(port));
  return {
    port,
    dataDir,
    urlOf: (database, role = OWNER_ROLE) => localUrl(options.home, port, database, role),
    stop: () => stopServer(binaries, dataDir, owner),
  };

  async function launchOnPort(): Promise<number> {
    await clearStalePidFile(dataDir);
    const free = await choosePort(options);
    launch(binaries, dataDir, free, options, owner);
    return free;
  }
}

function localUrl(home: string, port: number, database: string, role: string): string {
  return `postgresql://${role}:${databasePassword(role, home)}@127.0.0.1:${port}/${database}`;
}

/** Connection to a database of the home's server while that runs; undefined while it doesn't. */
export async function findLocalUrl(home: string, database: string, role: string): Promise<string | undefined> {
  if (!existsSync(home)) return undefined;
  const running = findRunningServer(await chooseDataDir(home, await findServerAccount()));
  return running && localUrl(home, running.port, database, role);
}

/** Stops the server of a data folder if one runs, ending its sessions; returns when it is gone. */
async function stopServer(binaries: PostgresBinaries, dataDir: string, account: Account | undefined): Promise<void> {
  if (findRunningServer(dataDir) === undefined) return;
  await runAs(binaries, "pg_ctl", ["-D", dataDir, "-m", "fast", "-w", "-t", "60", "stop"], account);
}

async function findServerAccount(): Promise<Account | undefined> {
  if (process.getuid?.() !== 0) return undefined;
  const entry = readFileSync("/etc/passwd", "utf8")
    .split("\n")
    .find((line) => line.startsWith("postgres:"));
  if (entry === undefined) throw new AppError("database.not_installed", { message: "PostgreSQL's user is missing" });
  const fields = entry.split(":");
  return { uid: Number(fields[2]), gid: Number(fields[3]) };
}

function ownerOf(path: string): Account {
  const { uid, gid } = statSync(path);
  return { uid, gid };
}

/** The home itself, or, where its server user cannot reach it, a folder of that user's named after the home. */
async function chooseDataDir(home: string, account: Account | undefined): Promise<string> {
  const inside = join(home, "database");
  if (account === undefined || existsSync(join(inside, "PG_VERSION"))) return inside;
  if (await canReach(home, account)) return inside;
  const name = createHash("sha256").update(home).digest("hex").slice(0, 16);
  return join("/var/lib/postgresql", `trimwright-${name}`);
}

async function canReach(folder: string, account: Account): Promise<boolean> {
  try {
    await run("/bin/sh", ["-c", 'cd "$1"', "sh", folder], { ...account, cwd: "/" });
    return true;
  } catch {
    return false;
  }
}

function binariesFor(home: string, dataDir: string): PostgresBinaries {
  const all = listPostgres(home);
  const versionFile = join(dataDir, "PG_VERSION");
  const major = existsSync(versionFile) ? Number(readFileSync(versionFile, "utf8")) : undefined;
  const found = all.find((candidate) => major === undefined || candidate.major === major);
  if (found !== undefined) return found;
  if (all.length === 0) throw new AppError("database.not_installed", { message: "PostgreSQL is not installed" });
  throw new AppError("database.version_missing", {
    major,
    message: `The data in ${dataDir} need PostgreSQL ${major}, which is not installed`,
  });
}

async function initialise(
  binaries: PostgresBinaries,
  dataDir: string,
  home: string,
  account: Account | undefined,
): Promise<void> {
  // What an interrupted initdb left would stop the next one; a finished one has PG_VERSION and never comes here.
  rmSync(dataDir, { recursive: true, force: true });
  mkdirSync(dataDir, { recursive: true, mode: 0o700 });
  const passwordFile = join(dirname(dataDir), `.owner-password-${process.pid}`);
  writeFileSync(passwordFile, databasePassword(OWNER_ROLE, home), { mode: 0o600 });
  if (account !== undefined) for (const path of [dataDir, passwordFile]) chownSync(path, account.uid, account.gid);
  const flags = ["-U", OWNER_ROLE, "-E", "UTF8", "--locale=C.UTF-8", "-A", "scram-sha-256", "--pwfile", passwordFile];
  try {
    await runAs(binaries, "initdb", ["-D", dataDir, ...flags, "-N"], account);
  } catch (error) {
    rmSync(dataDir, { recursive: true, force: true });
    throw error;
  } finally {
    rmSync(passwordFile, { force: true });
  }
}

/** Starts the server in a session of its own, so that Ctrl-C reaches only its supervisor, which then stops it in order. */
function launch(
  binaries: PostgresBinaries,
  dataDir: string,
  port: number,
  options: LocalServerOptions,
  account: Account | undefined,
): void {
  const settings = {
    listen_addresses: "127.0.0.1",
    unix_socket_directories: "",
    timezone: "UTC",
    log_timezone: "UTC",
    max_connections: String(options.maxConnections ?? 60),
    jit: "off",
    ...(options.fsync ? {} : { fsync: "off", synchronous_commit: "off", full_page_writes: "off", autovacuum: "off" }),
  };
  const log = openSync(logFile(options.home), "a");
  const flags = Object.entries(settings).flatMap(([name, value]) => ["-c", `${name}=${value}`]);
  const child = spawn(join(binaries.bin, "postgres"), ["-D", dataDir, "-p", String(port), ...flags], {
    ...account,
    cwd: "/",
    detached: true,
    stdio: ["ignore", log, log],
    env: programEnv(binaries),
  });
  closeSync(log);
  child.on("error", (error) => console.error(`PostgreSQL did not start: ${error.message}`));
  child.unref();
}

function logFile(home: string): string {
  return join(home, "database.log");
}

/** The server says "ready" on line 8 of its pid file; a connection proves that the port is its own. */
async function waitUntilReady(dataDir: string, port: number, home: string): Promise<void> {
  const deadline = Date.now() + READY_WITHIN_MS;
  const pidFile = join(dataDir, "postmaster.pid");
  let seen = false;
  for (let waited = 0; Date.now() < deadline; waited += 50) {
    const status = existsSync(pidFile) ? readFileSync(pidFile, "utf8").split("\n")[7]?.trim() : undefined;
    if (status === "ready" && (await answers(port))) return;
    seen ||= status !== undefined;
    // Gone again after it was there, or never there after a while: it ended, and its log says why.
    if (findRunningServer(dataDir) === undefined && (seen || waited > 5_000)) break;
    await delay(50);
  }
  const log = existsSync(logFile(home)) ? readFileSync(logFile(home), "utf8").trimEnd().split("\n") : [];
  const reason = log.filter((line) => /FATAL|PANIC|ERROR/.test(line)).at(-1) ?? log.at(-1) ?? "no log";
  throw new AppError("database.start_failed", { log: reason, message: `PostgreSQL did not start: ${reason}` });
}

function answers(port: number): Promise<boolean> {
  return new Promise((resolve) => {
    const socket = connect({ host: "127.0.0.1", port });
    socket.once("connect", () => resolve(true)).once("error", () => resolve(false));
    socket.once("connect", () => socket.destroy());
  });
}

/** The port of the last time while it is free, so that addresses stay the same from start to start. */
async function choosePort({ home, port }: LocalServerOptions): Promise<number> {
  if (port !== undefined) return insistOnPort(port);
  const file = join(home, "database-port");
  const last = existsSync(file) ? Number(readFileSync(file, "utf8")) : 0;
  return (await findFreePort(last)) ?? (await findFreePort(0)) ?? 0;
}

async function insistOnPort(port: number): Promise<number> {
  if ((await findFreePort(port)) !== undefined) return port;
  throw new AppError("database.start_failed", { port, message: `Port ${port} of the database is taken` });
}

/** Only what the programs need: nothing of ours, above all no PG… variable, changes what they do. */
function programEnv(binaries: PostgresBinaries): NodeJS.ProcessEnv {
  return { ...binaries.env, PATH: "/usr/bin:/bin", LANG: "C.UTF-8", NODE_ENV: "production" };
}

async function runAs(
  binaries: PostgresBinaries,
  program: string,
  args: string[],
  account: Account | undefined,
): Promise<void> {
  try {
    await run(join(binaries.bin, program), args, {
      ...account,
      cwd: "/",
      env: programEnv(binaries),
    });
  } catch (error) {
    const { stderr = "" } = error as { stderr?: string };
    const lines = stderr.trim().split("\n");
    const reason = lines.find((line) => /error|fatal|could not/i.test(line)) ?? lines.at(-1) ?? "";
    throw new AppError("database.start_failed", { program, message: `${program} failed: ${reason}` }, { cause: error });
  }
}
