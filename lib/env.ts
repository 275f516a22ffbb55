/**
 * The only reader of `process.env`. Read lazily, so that a build needs none of it, and once per process.
 * Secrets that are not given are made once and kept in `TRIMWRIGHT_HOME/secrets`, readable by the owner only.
 */
import { generateKeyPairSync, randomBytes } from "node:crypto";
import { existsSync, mkdirSync, readFileSync, writeFileSync } from "node:fs";
import { dirname, join, resolve } from "node:path";
import { z } from "zod";
import { AppError } from "@/lib/errors";

const text = z.string().trim().min(1);
const postgresUrl = text.refine((value) => /^postgres(ql)?:\/\//.test(value), "must begin with postgresql://");

const variables = z.object({
  PORT: z.coerce.number().int().min(1).max(65535).default(3000),
  HOST: text.default("127.0.0.1"),
  TRIMWRIGHT_HOME: text.default(".local"),
  DATABASE_URL: postgresUrl.optional(),
  TRIMWRIGHT_OWNER_URL: postgresUrl.optional(),
  TRIMWRIGHT_DEMO: z.enum(["0", "1"]).default("1"),
  TRIMWRIGHT_ORIGIN: z.url().optional(),
  TRIMWRIGHT_DIST_DIR: text.default(".next"),
  TRIMWRIGHT_SIGNING_KEY_FILE: text.optional(),
  NEXTAUTH_SECRET: text.min(32).optional(),
  NEXT_SERVER_ACTIONS_ENCRYPTION_KEY: text.optional(),
  SMTP_URL: z.url().optional(),
  MAIL_FROM: text.default("Trimwright <trimwright@localhost>"),
  LOG_LEVEL: z.enum(["silent", "fatal", "error", "warn", "info", "debug", "trace"]).default("info"),
});

export interface Env {
  readonly port: number;
  readonly host: string;
  /** Absolute folder of everything this installation keeps: database, keys, logs. */
  readonly home: string;
  /** Connection of the app's role; undefined until a start or the environment names one. */
  readonly databaseUrl: string | undefined;
  /** Connection of the owner, for migrations only. */
  readonly ownerUrl: string | undefined;
  readonly demo: boolean;
  /** Scheme, host and port that browsers use; `Origin` is compared with it. No trailing slash. */
  readonly origin: string;
  /** Folder of the built app, relative to the checkout. */
  readonly distDir: string;
  readonly smtpUrl: string | undefined;
  readonly mailFrom: string;
  readonly logLevel: "silent" | "fatal" | "error" | "warn" | "info" | "debug" | "trace";
}

let cached: Env | undefined;

/**
 * The settings of this process.
 * @throws AppError `settings.invalid` {variables} naming each variable that cannot be used, never its value.
 */
export function env(): Env {
  cached ??= parseEnv(process.env);
  return cached;
}

/** Sets variables for this process and reads the settings anew: a start decides ports and addresses while it runs. */
export function setEnv(values: Record<string, string>): void {
  Object.assign(process.env, values); // a string for every variable: an undefined would become the text "undefined"
  cached = undefined;
}

/** The process's variables with some changed, for a child process; undefined takes a variable away. */
export function childEnv(values: Record<string, string | undefined>): NodeJS.ProcessEnv {
  return { ...process.env, ...values } as NodeJS.ProcessEnv;
}

/**
 * Lets the C library take a child's memory in large pages where Linux has them: a bundle of 5,000 devices touches 6,000 pages of
 * 4 KB, and on a virtual machine the first touch of one can take 15 µs. Other C libraries pass over it; what is set stays.
 */
export function largePagesEnv(): { GLIBC_TUNABLES: string } {
  return { GLIBC_TUNABLES: process.env.GLIBC_TUNABLES ?? "glibc.malloc.hugetlb=1" };
}

/** Whether somebody said how this process takes its memory; a process can't be told afterwards. */
export function hasMemorySettings(): boolean {
  return process.env.GLIBC_TUNABLES !== undefined;
}

/** Whether this process is a script of npm's; its children inherit the mark, so a child that it starts takes it away. */
export function isRunByNpm(): boolean {
  return process.env.npm_lifecycle_event !== undefined;
}

/** Folder that a command was called from; npm runs its scripts in the checkout. */
export function callerFolder(): string {
  return process.env.INIT_CWD || process.cwd();
}

/** Folders that programs are looked for in. */
export function searchPath(): string {
  return process.env.PATH ?? "/usr/bin:/bin";
}

/** Address of a running test server (its superuser), given by the test command to the test runner. */
export function findTestServerUrl(): string | undefined {
  return process.env.TRIMWRIGHT_TEST_SERVER_URL;
}

/** Settings from variables. An empty variable counts as absent. Exported for tests. */
export function parseEnv(source: Record<string, string | undefined>): Env {
  const given = Object.fromEntries(Object.entries(source).filter(([, value]) => value !== undefined && value !== ""));
  const result = variables.safeParse(given);
  if (!result.success) {
    const names = [...new Set(result.error.issues.map((issue) => String(issue.path[0])))];
    const reasons = result.error.issues.map((issue) => `${String(issue.path[0])}: ${issue.message}`);
    throw new AppError("settings.invalid", { variables: names, message: `Setting not usable: ${reasons.join("; ")}` });
  }
  const v = result.data;
  return {
    port: v.PORT,
    host: v.HOST,
    home: resolve(v.TRIMWRIGHT_HOME),
    databaseUrl: v.DATABASE_URL,
    ownerUrl: v.TRIMWRIGHT_OWNER_URL,
    demo: v.TRIMWRIGHT_DEMO === "1",
    origin: new URL(v.TRIMWRIGHT_ORIGIN ?? `http://127.0.0.1:${v.PORT}`).origin,
    distDir: v.TRIMWRIGHT_DIST_DIR,
    smtpUrl: v.SMTP_URL,
    mailFrom: v.MAIL_FROM,
    logLevel: v.LOG_LEVEL,
  };
}

/** Tells next-auth, which reads the environment only, the origin; otherwise it would guess one. */
export function announceOrigin(): void {
  process.env.NEXTAUTH_URL = env().origin;
}

/** Secret that signs the browser sessions' tokens: `NEXTAUTH_SECRET`, or one made for this home. */
export function authSecret(): string {
  return process.env.NEXTAUTH_SECRET || keptSecret("session", () => randomBytes(32).toString("base64url"));
}

/** Key that encrypts server actions' closures, 32 bytes in base64; the same for build and start. */
export function actionsKey(): string {
  const given = process.env.NEXT_SERVER_ACTIONS_ENCRYPTION_KEY;
  return given || keptSecret("server-actions", () => randomBytes(32).toString("base64"));
}

/** A password for a role of the local server, made once for this home. */
export function databasePassword(role: string, home = env().home): string {
  return keptSecret(`database-${role}`, () => randomBytes(24).toString("base64url"), home);
}

/**
 * Path of the Ed25519 private key (PKCS #8, PEM) that signs bundles. It lies outside the database on purpose, so that
 * a copy of the database signs nothing. Made once in the home when `TRIMWRIGHT_SIGNING_KEY_FILE` names no other.
 * @throws AppError `settings.invalid` when the named file is not there.
 */
export function signingKeyFile(): string {
  const given = process.env.TRIMWRIGHT_SIGNING_KEY_FILE;
  if (given) {
    if (existsSync(given)) return resolve(given);
    throw new AppError("settings.invalid", {
      variables: ["TRIMWRIGHT_SIGNING_KEY_FILE"],
      message: "TRIMWRIGHT_SIGNING_KEY_FILE names a file that is not there",
    });
  }
  keptSecret("signing-key.pem", () =>
    generateKeyPairSync("ed25519").privateKey.export({ type: "pkcs8", format: "pem" }).toString(),
  );
  return join(env().home, "secrets", "signing-key.pem");
}

function keptSecret(name: string, make: () => string, home = env().home): string {
  const file = join(home, "secrets", name);
  if (!existsSync(file)) {
    mkdirSync(dirname(file), { recursive: true, mode: 0o700 });
    try {
      writeFileSync(file, make(), { mode: 0o600, flag: "wx" });
    } catch (error) {
      // Another process of this home was quicker; its secret is the one to use.
      if ((error as NodeJS.ErrnoException).code !== "EEXIST") throw error;
    }
  }
  return readFileSync(file, "utf8").trim();
}
