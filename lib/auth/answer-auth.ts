import { NextRequest } from "next/server";
import NextAuth from "next-auth";
import { announceOrigin, env } from "@/lib/env";
import { AppError, statusOf } from "@/lib/errors";
import { problemResponse, toAppError } from "@/lib/http/problem";
import { parseJson, readBytes } from "@/lib/http/read-body";
import { assertSameOrigin, newContext } from "@/lib/http/route";
import { log } from "@/lib/log";
import { type AuthExchange, authOptions } from "./auth-options";
import { AuthReply } from "./auth-reply";

/** What of next-auth is in use: the rest of its actions, its own pages and its client's log answer 404. */
const ACTIONS: Record<string, readonly string[]> = {
  GET: ["csrf", "session", "providers", "signin", "signout", "error"],
  POST: ["callback", "signout"],
};
const FORM_MAX_BYTES = 16 * 1024;

/**
 * Answers a request below `/api/auth`. next-auth does the work, through the pair of objects that it takes outside the App
 * Router, so that the same code runs in a test. Refusals come as problem details to who asks for JSON (`json=true`), and to a
 * plain form as next-auth's redirect to the sign-in page with the code as `error`.
 */
export async function answerAuth(request: Request, action: readonly string[]): Promise<Response> {
  const ctx = newContext({ kind: "public" }, addressOf(request.headers));
  try {
    if (!ACTIONS[request.method]?.includes(action[0] ?? "")) {
      throw new AppError("auth.not_found", { message: "There is nothing at this address." });
    }
    if (request.method === "POST" && request.headers.has("origin")) assertSameOrigin(request.headers);
    announceOrigin();
    const body = await readForm(request);
    const exchange: AuthExchange = { ctx, headers: request.headers };
    const reply = new AuthReply();
    await NextAuth(requestOf(request, action, body) as never, reply as never, authOptions(exchange));
    if (exchange.refusal && !isInReply(exchange.refusal, reply, body)) throw exchange.refusal;
    return reply.toResponse();
  } catch (thrown) {
    const error = toAppError(thrown);
    if (statusOf(error.code).status >= 500)
      log.error({ requestId: ctx.requestId, err: error.cause ?? error }, "sign-in or sign-out failed");
    return problemResponse(error, ctx.requestId);
  }
}

/**
 * Whether next-auth's own reply says what was refused: the end of a session does (it is empty and its cookie goes), and so
 * does the redirect of a plain form. A fault of ours never stands in one: a dead database signs nobody out.
 */
function isInReply(refusal: AppError, reply: AuthReply, body: Record<string, unknown>): boolean {
  if (statusOf(refusal.code).status >= 500) return false;
  return refusal.code === "auth.required" || (reply.location !== null && body.json !== "true");
}

/** The address that the nearest proxy, or Next itself, saw; what stands before it in the list can be invented. */
function addressOf(headers: Headers): string {
  return (headers.get("x-forwarded-for")?.split(",").at(-1) ?? "").trim().slice(0, 64);
}

/** @throws AppError `request.too_large`, `request.malformed` */
async function readForm(request: Request): Promise<Record<string, unknown>> {
  if (request.method !== "POST") return {};
  const bytes = await readBytes(request, FORM_MAX_BYTES);
  if (!request.headers.get("content-type")?.includes("application/json"))
    return Object.fromEntries(new URLSearchParams(bytes.toString("utf8")));
  const parsed = parseJson(bytes);
  return typeof parsed === "object" && parsed !== null ? { ...parsed } : {};
}

function requestOf(request: Request, action: readonly string[], body: Record<string, unknown>) {
  const cookies = new NextRequest(env().origin, { headers: request.headers }).cookies.getAll();
  return {
    method: request.method,
    headers: Object.fromEntries(request.headers),
    cookies: Object.fromEntries(cookies.map(({ name, value }) => [name, value])),
    query: { ...Object.fromEntries(new URL(request.url).searchParams), nextauth: action },
    body,
  };
}
