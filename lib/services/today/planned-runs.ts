import { listWaitingRunPlans } from "@/db/queries/run-plans";
import { formatNumberOf } from "@/lib/domain/format/figure";
import type { Ctx } from "@/lib/services/context";
import type { TodayItem } from "@/schemas/api/today";

/** Planned runs that wait for their readings, the longest waiting first. */
export async function listPlannedRuns(ctx: Ctx, limit: number): Promise<TodayItem[]> {
  const plans = await listWaitingRunPlans(ctx.db, limit);
  return plans.map((plan) => ({
    kind: "run-plan",
    title: plan.name,
    detail: `${plan.lotCode} · ${plan.purpose} run · ${formatNumberOf(plan.deviceCount, "device")}`,
    who: plan.createdByName,
    at: plan.createdAt.toISOString(),
    tone: "wait",
    link: `/lots/${encodeURIComponent(plan.lotCode)}/readings/plans/${plan.id}`,
    digest: null,
  }));
}
