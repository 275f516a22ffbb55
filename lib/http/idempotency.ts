import { AppError } from "@/lib/errors";
import type { Ctx } from "@/lib/services/context";
import { replyOnce } from "@/lib/services/requests/reply-once";
import type { AnyCommand } from "./command";

/** Honours `Idempotency-Key` on calls that create. @throws AppError as {@link replyOnce}, `request.invalid` for a key of a wrong length */
export async function withIdempotency(
  command: AnyCommand,
  ctx: Ctx,
  headers: Headers,
  body: Buffer,
  run: () => Promise<Response>,
): Promise<Response> {
  const key = headers.get("idempotency-key");
  if (!command.idempotent || key === null || (ctx.actor.kind !== "person" && ctx.actor.kind !== "station"))
    return run();
  if (key.length < 1 || key.length > 200)
    throw new AppError("request.invalid", { message: "Idempotency-Key takes 1 to 200 characters." });
  const reply = await replyOnce(ctx, { actorId: ctx.actor.id, route: command.id, key, body }, async () => {
    const response = await run();
    return { status: response.status, body: await response.json() };
  });
  const headersOut: Record<string, string> = { "cache-control": "no-store" };
  if (reply.replayed) headersOut["idempotency-replayed"] = "true";
  return Response.json(reply.body, { status: reply.status, headers: headersOut });
}
