/** The API as a client meets it: the real route files, sessions and keys, over a test database. */
import { mkdtempSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { v7 as uuidv7 } from "uuid";
import { afterAll } from "vitest";
import { closeDb } from "@/db/client";
import type { Db } from "@/db/executor";
import { sessionCookieName, sessionToken } from "@/lib/auth/session-token";
import { env, setEnv } from "@/lib/env";
import type { PersonCtx } from "@/lib/services/context";
import { openTestDatabase } from "./database";
import { drainJobs } from "./jobs";
import { addPeople, type PersonName, type TestPeople } from "./people";
import { findRoute, importRoute } from "./route-files";

export type Method = "GET" | "POST" | "PUT" | "PATCH" | "DELETE";

export interface CallOptions {
  /** A person by their session, or whoever holds a bearer key; nobody where left out. */
  as?: PersonName | { bearer: string };
  /** An object is sent as JSON; text and bytes as they are, with the content type of `headers`. */
  body?: unknown;
  headers?: Record<string, string>;
  query?: Record<string, string | number | boolean>;
}

export interface Reply {
  status: number;
  /** Parsed JSON, else text for text types, else bytes; null where there is none. */
  // biome-ignore lint/suspicious/noExplicitAny: tests look at members one by one; routes check their replies themselves.
  body: any;
  headers: Headers;
}

export interface TestApi {
  /** As the app connects. */
  db: Db;
  /** As the owner connects. */
  owner: Db;
  people: TestPeople;
  call(method: Method, path: string, options?: CallOptions): Promise<Reply>;
  /** A signed-in person's context, for calling services. */
  ctx(name: PersonName): PersonCtx;
  /** Does every waiting job. @returns how many */
  runJobs(): Promise<number>;
  close(): Promise<void>;
}

let open: TestApi | undefined;

// Before the database is dropped, which its own module does at the end of the file: the app's pool would lose its connections.
afterAll(async () => open?.close());

/** Opens a database with the people of {@link addPeople} and points the app at it. One at a time. */
export async function openTestApi(): Promise<TestApi> {
  const database = await openTestDatabase();
  const home = mkdtempSync(join(tmpdir(), "trimwright-test-"));
  await open?.close();
  setEnv({
    DATABASE_URL: database.appUrl,
    TRIMWRIGHT_HOME: home,
    TRIMWRIGHT_ORIGIN: "http://127.0.0.1:3000",
    NEXTAUTH_URL: "http://127.0.0.1:3000",
    NEXTAUTH_SECRET: "a secret for tests only, nothing is guarded by it",
  });
  const people = await addPeople(database.db);
  const api: TestApi = {
    db: database.db,
    owner: database.owner,
    people,
    call: (method, path, options = {}) => callRoute(people, method, path, options),
    ctx: (name) => ({
      db: database.db,
      actor: people[name],
      now: () => new Date(),
      newId: uuidv7,
      requestId: uuidv7(),
      address: "",
    }),
    runJobs: () => drainJobs(database.db),
    close: async () => {
      open = undefined;
      await closeDb();
      await database.close();
      rmSync(home, { recursive: true, force: true });
    },
  };
  open = api;
  return api;
}

async function callRoute(people: TestPeople, method: Method, path: string, options: CallOptions): Promise<Reply> {
  const url = new URL(path, "http://path");
  for (const [name, value] of Object.entries(options.query ?? {})) url.searchParams.set(name, String(value));
  const { file, params } = findRoute(url.pathname);
  const handler = (await importRoute(file))[method];
  if (handler === undefined) return { status: 405, body: null, headers: new Headers() };
  const prefix = url.pathname.startsWith("/api/") ? "" : "/api/v1";
  const request = new Request(`${env().origin}${prefix}${url.pathname}${url.search}`, {
    method,
    headers: await headersOf(people, method, options),
    ...(options.body === undefined ? {} : { body: bodyOf(options.body) }),
  });
  return readReply(await handler(request, { params: Promise.resolve(params) }));
}

async function headersOf(people: TestPeople, method: Method, options: CallOptions): Promise<Headers> {
  const headers = new Headers();
  if (options.body !== undefined && !isRaw(options.body)) headers.set("content-type", "application/json");
  if (typeof options.as === "string") {
    headers.set("cookie", `${sessionCookieName()}=${await sessionToken(people[options.as].sessionId)}`);
    if (method !== "GET") headers.set("origin", env().origin);
  } else if (options.as) headers.set("authorization", `Bearer ${options.as.bearer}`);
  for (const [name, value] of Object.entries(options.headers ?? {})) headers.set(name, value);
  return headers;
}

function isRaw(body: unknown): body is string | Uint8Array<ArrayBuffer> {
  return typeof body === "string" || body instanceof Uint8Array;
}

function bodyOf(body: unknown): string | Uint8Array<ArrayBuffer> {
  return isRaw(body) ? body : JSON.stringify(body);
}

async function readReply(response: Response): Promise<Reply> {
  const { status, headers } = response;
  const type = headers.get("content-type") ?? "";
  const bytes = Buffer.from(await response.arrayBuffer());
  if (bytes.length === 0) return { status, headers, body: null };
  if (/^application\/([\w.-]+\+)?json/.test(type)) return { status, headers, body: JSON.parse(bytes.toString("utf8")) };
  return { status, headers, body: type.startsWith("text/") ? bytes.toString("utf8") : bytes };
}
