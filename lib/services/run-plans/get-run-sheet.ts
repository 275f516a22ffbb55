import { toSVG } from "bwip-js/node";
import { getLot } from "@/db/queries/lots";
import { env } from "@/lib/env";
import type { Ctx } from "@/lib/services/context";
import type { RunPlanView } from "@/schemas/api/run-plans";
import { getRunPlanView } from "./get-run-plan";

export interface RunSheet {
  plan: RunPlanView;
  family: string;
  revision: number;
  /** Where the plan stands, for the code. */
  address: string;
  /** QR code (ISO/IEC 18004) of the address, as SVG. */
  qrSvg: string;
}

/** What is printed for who runs a plan. @throws AppError `run_plan.not_found` */
export async function getRunSheet(ctx: Ctx, id: string): Promise<RunSheet> {
  const plan = await getRunPlanView(ctx, id);
  const lot = await getLot(ctx.db, plan.lot);
  const address = `${env().origin}/lots/${encodeURIComponent(plan.lot)}/readings/plans/${plan.id}`;
  const qrSvg = toSVG({ bcid: "qrcode", text: address, scale: 3, padding: 2, backgroundcolor: "FFFFFF" });
  return { plan, family: lot.familyCode, revision: lot.revisionNumber, address, qrSvg };
}
