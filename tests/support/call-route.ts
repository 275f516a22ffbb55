/** Calls a route file as a client would: the real handler with a real request, as a person of the tests. */
import { sessionCookieName, sessionToken } from "@/lib/auth/session-token";
import { env } from "@/lib/env";
import type { PersonName, TestPeople } from "./people";
import { findRoute, importRoute } from "./route-files";

export type Method = "GET" | "POST" | "PUT" | "PATCH" | "DELETE";

export interface CallOptions {
  /** A person by their session, or whoever holds a bearer key; nobody where left out. */
  as?: PersonName | { bearer: string };
  /** An object is sent as JSON; text, bytes and streams as they are, with the content type of `headers`. */
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

/** Answers a call of a route below `/api/v1`, or of any path from `/api/` on. */
export async function callRoute(
  people: TestPeople,
  method: Method,
  path: string,
  options: CallOptions,
): Promise<Reply> {
  const url = new URL(path, "http://path");
  for (const [name, value] of Object.entries(options.query ?? {})) url.searchParams.set(name, String(value));
  const { file, params } = findRoute(url.pathname);
  const handler = (await importRoute(file))[method];
  if (handler === undefined) return { status: 405, body: null, headers: new Headers() };
  const prefix = url.pathname.startsWith("/api/") ? "" : "/api/v1";
  const request = new Request(`${env().origin}${prefix}${url.pathname}${url.search}`, {
    method,
    headers: await headersOf(people, method, options),
    ...(options.body === undefined ? {} : { body: bodyOf(options.body), duplex: "half" }),
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

type RawBody = string | Uint8Array<ArrayBuffer> | ReadableStream<Uint8Array>;

function isRaw(body: unknown): body is RawBody {
  return typeof body === "string" || body instanceof Uint8Array || body instanceof ReadableStream;
}

function bodyOf(body: unknown): RawBody {
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
