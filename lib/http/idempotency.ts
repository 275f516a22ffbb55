import { createHash } from "node:crypto";
import { deleteIdempotentReply, insertIdempotentReply, storeIdempotentReply } from "@/db/queries/idempotency";
import { AppError } from "@/lib/errors";
import type { Ctx } from "@/lib/services/context";
import type { AnyCommand } from "./command";

/**
 * Runs a creating call once per `Idempotency-Key`, person or station, and route; a repetition within 24 h gets the first reply.
 * Only successes are kept, so that a refused call may be mended and sent again under the same key.
 * @throws AppError `idempotency.key_reused` (same key, other body), `idempotency.in_progress`
 */
export async function withIdempotency(
  command: AnyCommand,
  ctx: Ctx,
  headers: Headers,
  body: Buffer,
  run: () => Promise<Response>,
): Promise<Response> {
  const key = headers.get("idempotency-key");
  if (!command.idempotent || key === null || (ctx.actor.kind !== "person" && ctx.actor.kind !== "station")) return run();
  if (key.length < 1 || key.length > 200) throw new AppError("request.invalid", { message: "Idempotency-Key takes 1 to 200 characters." });
  const claim = {
    actorId: ctx.actor.id,
    route: command.id,
    key,
    bodySha256: createHash("sha256").update(body).digest(),
    createdAt: ctx.now(),
  };
  const earlier = await insertIdempotentReply(ctx.db, claim);
  if (earlier) {
    if (!earlier.bodySha256.equals(claim.bodySha256)) {
      throw new AppError("idempotency.key_reused", { message: "This Idempotency-Key was used with another body; take a new key." });
    }
    if (earlier.status === null) throw new AppError("idempotency.in_progress", { message: "The first call with this key is still running." });
    return Response.json(earlier.body, { status: earlier.status, headers: { "idempotency-replayed": "true" } });
  }
  try {
    const response = await run();
    await storeIdempotentReply(ctx.db, claim, response.status, await response.clone().json());
    return response;
  } catch (error) {
    await deleteIdempotentReply(ctx.db, claim);
    throw error;
  }
}
