import { lockRunPlan, markPlanDropped } from "@/db/queries/run-plans";
import { AppError } from "@/lib/errors";
import { assertRole, type PersonCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";

/** Drops a planned run that no readings were uploaded for. @throws AppError `run_plan.not_found`, `run_plan.wrong_state` */
export async function dropRunPlan(ctx: PersonCtx, input: { id: string; reason: string }): Promise<void> {
  assertRole(ctx, "engineer");
  await ctx.db.transaction().execute(async (trx) => {
    const plan = await lockRunPlan(trx, input.id);
    if (plan.state !== "planned") {
      const message = plan.state === "used" ? "Readings were uploaded for it." : "It was dropped before.";
      throw new AppError("run_plan.wrong_state", { state: plan.state, message });
    }
    await markPlanDropped(trx, plan.id, { reason: input.reason, by: ctx.actor.id, at: ctx.now() });
    const data = { lot: plan.lotCode, name: plan.name };
    await appendEvent(ctx, trx, {
      action: "run.plan_dropped",
      subject: plan.id,
      data,
      texts: { reason: input.reason },
    });
  });
}
