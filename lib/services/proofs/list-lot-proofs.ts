import { getLot } from "@/db/queries/lots";
import { findLivePackage, type PackageRow } from "@/db/queries/packages";
import { listProofRunsOfLot } from "@/db/queries/proofs";
import { type FirstOffProof, openFirstOff, summariseProofs } from "@/lib/domain/proof/first-off";
import type { Ctx } from "@/lib/services/context";
import type { LotProofs } from "@/schemas/api/proofs";
import { judgeProofRuns } from "./judge-proof-run";

/**
 * What the lot's proof runs show, by layout and firmware, and what they show of the release that is live.
 * @throws AppError `lot.not_found`
 */
export async function listLotProofs(ctx: Ctx, codeOrId: string): Promise<LotProofs> {
  const lot = await getLot(ctx.db, codeOrId);
  const items = await summariseLot(ctx, lot);
  const live = await findLivePackage(ctx.db, lot.id);
  if (!live) return { live: null, items };
  return { live: ofPackage(items, live) ?? openFirstOff(live.layoutVersion, live.firmware), items };
}

/** What the lot's proof runs show of a package's layout and firmware; null where none judged a device. */
export async function findFirstOff(ctx: Ctx, pkg: PackageRow): Promise<FirstOffProof | null> {
  return ofPackage(await summariseLot(ctx, { id: pkg.lotId, code: pkg.lotCode }), pkg) ?? null;
}

async function summariseLot(ctx: Ctx, lot: { id: string; code: string }): Promise<FirstOffProof[]> {
  return summariseProofs(await judgeProofRuns(ctx, lot.code, await listProofRunsOfLot(ctx.db, lot.id)));
}

function ofPackage(items: readonly FirstOffProof[], { layoutVersion, firmware }: PackageRow) {
  return items.find((item) => item.layout === layoutVersion && item.firmware === firmware);
}
