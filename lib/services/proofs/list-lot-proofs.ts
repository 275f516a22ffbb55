import { getLot } from "@/db/queries/lots";
import { findLivePackage } from "@/db/queries/packages";
import { listProofRunsOfLot } from "@/db/queries/proofs";
import { openFirstOff, summariseProofs } from "@/lib/domain/proof/first-off";
import type { Ctx } from "@/lib/services/context";
import type { LotProofs } from "@/schemas/api/proofs";
import { judgeProofRuns } from "./judge-proof-run";

/**
 * What the lot's proof runs show, by layout and firmware, and what they show of the release that is live.
 * @throws AppError `lot.not_found`
 */
export async function listLotProofs(ctx: Ctx, codeOrId: string): Promise<LotProofs> {
  const lot = await getLot(ctx.db, codeOrId);
  const judged = await judgeProofRuns(ctx, lot.code, await listProofRunsOfLot(ctx.db, lot.id));
  const items = summariseProofs(judged);
  const live = await findLivePackage(ctx.db, lot.id);
  if (!live) return { live: null, items };
  const { layoutVersion: layout, firmware } = live;
  const proven = items.find((item) => item.layout === layout && item.firmware === firmware);
  return { live: proven ?? openFirstOff(layout, firmware), items };
}
