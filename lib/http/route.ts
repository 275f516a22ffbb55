import { v7 as uuidv7 } from "uuid";
import type { z } from "zod";
import { getDb } from "@/db/client";
import { resolveActor } from "@/lib/auth/resolve-actor";
import { env } from "@/lib/env";
import { AppError } from "@/lib/errors";
import { log } from "@/lib/log";
import { type Actor, assertRole, type Ctx } from "@/lib/services/context";
import { giveWay } from "@/lib/services/in-slices";
import { type AnyCommand, type CommandInput, isUpload } from "./command";
import { withIdempotency } from "./idempotency";
import { problemResponse, toAppError } from "./problem";
import { JSON_MAX_BYTES, parseJson, readBytes } from "./read-body";
import { validate, validateLarge } from "./validate";

type RouteContext = { params: Promise<Record<string, string | string[]>> };
export type RouteHandler = (request: Request, context: RouteContext) => Promise<Response>;

/** Makes a context for one request. */
export function newContext(actor: Actor, address = ""): Ctx {
  return { db: getDb(), actor, now: () => new Date(), newId: uuidv7, requestId: uuidv7(), address };
}

/** The App Router handler of a command: who asks, is it allowed, is it well formed, do it, is the reply what was promised. */
export function route(command: AnyCommand): RouteHandler {
  return async (request, context) => {
    let requestId: string = uuidv7();
    try {
      const actor = await resolveActor(request.headers);
      const ctx = newContext(actor, request.headers.get("x-forwarded-for") ?? "");
      requestId = ctx.requestId;
      assertMayCall(command, actor, request.headers, request.method);
      const raw = { params: await context.params, query: Object.fromEntries(new URL(request.url).searchParams) };
      const input = await readInput(command, request, raw);
      return await withIdempotency(command, ctx, request.headers, input.bytes, async () => {
        return replyOf(command, await command.handle(ctx as never, input.value as never));
      });
    } catch (thrown) {
      const error = toAppError(thrown);
      if (error.code === "server.fault")
        log.error({ requestId, command: command.id, err: error.cause ?? error }, "request failed");
      return problemResponse(error, requestId);
    }
  };
}

/**
 * Role, credential and origin of a call.
 * @throws AppError `auth.required`, `auth.forbidden`, `auth.session_required`, `auth.origin_mismatch`
 */
export function assertMayCall(command: AnyCommand, actor: Actor, headers: Headers, method: string): void {
  const { access } = command;
  if (access.who === "public") return;
  if (actor.kind === "public")
    throw new AppError("auth.required", { message: "Send a session cookie or a bearer key." });
  if (access.who === "station") {
    if (actor.kind !== "station")
      throw new AppError("auth.forbidden", { needs: ["station"], message: "Only a station's key may call this." });
    return;
  }
  if (actor.kind !== "person")
    throw new AppError("auth.forbidden", { needs: access.roles, message: "A station's key may not call this." });
  assertRole({ actor } as Ctx, ...access.roles);
  const changes = method !== "GET" && method !== "HEAD";
  if (actor.via === "session") {
    if (changes) assertSameOrigin(headers);
    return;
  }
  const ofEngineer = access.roles.includes("engineer") && actor.roles.includes("engineer");
  if (access.session || (changes && !access.reads && !ofEngineer)) {
    throw new AppError("auth.session_required", {
      message: "A key reads and does an engineer's work; this takes a signed-in person in a browser.",
    });
  }
}

/** The `Origin` of a state-changing call made with a cookie. @throws AppError `auth.origin_mismatch` */
export function assertSameOrigin(headers: Headers): void {
  if (headers.get("origin") !== env().origin) {
    throw new AppError("auth.origin_mismatch", {
      message: `The request did not come from this site's own pages, which are at ${env().origin}.`,
    });
  }
}

async function readInput(command: AnyCommand, request: Request, raw: { params: unknown; query: unknown }) {
  const params = command.params ? validate(command.params as z.ZodType, raw.params, "/path") : {};
  const query = command.query ? validate(command.query as z.ZodType, raw.query, "/query") : {};
  const contentType = (request.headers.get("content-type") ?? "").split(";")[0]?.trim().toLowerCase() ?? "";
  let bytes: Buffer = Buffer.alloc(0);
  let body: unknown;
  if (isUpload(command.body)) {
    const { contentTypes, maxBytes } = command.body.upload;
    if (!contentTypes.includes(contentType)) {
      throw new AppError("request.unsupported_type", {
        contentTypes,
        message: `Send one of ${contentTypes.join(", ")}.`,
      });
    }
    bytes = await readBytes(request, maxBytes);
    body = { bytes, contentType };
  } else if (command.body) {
    if (contentType !== "" && contentType !== "application/json") {
      throw new AppError("request.unsupported_type", {
        contentTypes: ["application/json"],
        message: "Send application/json.",
      });
    }
    bytes = await readBytes(request, JSON_MAX_BYTES);
    body = await readJson(command.body as z.ZodType, bytes);
  }
  return {
    bytes,
    value: { params, query, body, headers: request.headers } as CommandInput<undefined, undefined, undefined>,
  };
}

/** From here on a body takes long enough for others to be let in between: about 10 ms a part. */
const LARGE_JSON_BYTES = 512 * 1024;

async function readJson(schema: z.ZodType, bytes: Buffer): Promise<unknown> {
  const value = parseJson(bytes);
  if (bytes.length < LARGE_JSON_BYTES) return validate(schema, value);
  await giveWay();
  return validateLarge(schema, value);
}

/** The reply as promised: unknown members are left out, a member missing is our bug and not the caller's problem to find. */
function replyOf(command: AnyCommand, value: unknown): Response {
  if (value instanceof Response) return value;
  const { status, schema } = command.reply;
  if (!schema) return new Response(null, { status });
  const checked = (schema as z.ZodType).safeParse(value);
  if (!checked.success) throw new Error(`${command.id} answers outside its schema: ${checked.error.message}`);
  return Response.json(checked.data, { status, headers: { "cache-control": "no-store" } });
}
