import { headers } from "next/headers";
import type { z } from "zod";
import { resolveActor } from "@/lib/auth/resolve-actor";
import { log } from "@/lib/log";
import type { AnyCommand } from "./command";
import { type ProblemDetails, problemOf, toAppError } from "./problem";
import { assertMayCall, newContext } from "./route";
import { validate } from "./validate";

export type ActionResult<T = unknown> = { ok: true; value: T } | { ok: false; problem: ProblemDetails };

/**
 * Runs a command for a server action: the same rights, origin check, schemas and service as its route.
 * Refusals come back as problem details, so that a form can put them beside the field.
 */
export async function runAction<T = unknown>(
  command: AnyCommand,
  input: { params?: Record<string, string>; query?: Record<string, string>; body?: unknown },
): Promise<ActionResult<T>> {
  const requestHeaders = await headers();
  const actor = await resolveActor(requestHeaders);
  const ctx = newContext(actor, requestHeaders.get("x-forwarded-for") ?? "");
  try {
    assertMayCall(command, actor, requestHeaders, "POST");
    const params = command.params ? validate(command.params as z.ZodType, input.params ?? {}, "/path") : {};
    const query = command.query ? validate(command.query as z.ZodType, input.query ?? {}, "/query") : {};
    const body = command.body ? validate(command.body as z.ZodType, input.body ?? {}) : undefined;
    const value = await command.handle(ctx as never, { params, query, body, headers: requestHeaders } as never);
    return {
      ok: true,
      value: command.reply.schema ? ((command.reply.schema as z.ZodType).parse(value) as T) : (undefined as T),
    };
  } catch (thrown) {
    const error = toAppError(thrown);
    if (error.code === "server.fault")
      log.error({ requestId: ctx.requestId, command: command.id, err: error.cause ?? error }, "action failed");
    return { ok: false, problem: problemOf(error, ctx.requestId) };
  }
}
