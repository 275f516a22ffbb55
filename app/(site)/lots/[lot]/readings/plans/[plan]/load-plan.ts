import { notFound } from "next/navigation";
import { orNotFound } from "@/lib/http/page-context";
import type { PersonCtx } from "@/lib/services/context";
import { getRunPlanView } from "@/lib/services/run-plans/get-run-plan";
import { id } from "@/schemas/api/common";
import type { RunPlanView } from "@/schemas/api/run-plans";

export interface PlanParams {
  params: Promise<{ lot: string; plan: string }>;
}

/** The plan that an address names; the not-found page where there is none, or not in that lot. */
export async function loadPlan(ctx: PersonCtx, params: PlanParams["params"]): Promise<RunPlanView> {
  const { lot, plan } = await params;
  if (!id.safeParse(plan).success) notFound();
  const view = await orNotFound(getRunPlanView(ctx, plan));
  if (view.lot !== decodeURIComponent(lot).toUpperCase()) notFound();
  return view;
}
