import { listLotsToProve } from "@/db/queries/proofs";
import { formatCount } from "@/lib/domain/format/figure";
import type { Ctx } from "@/lib/services/context";
import { listLotProofs } from "@/lib/services/proofs/list-lot-proofs";
import type { FirstOff } from "@/schemas/api/proofs";
import type { TodayItem } from "@/schemas/api/today";

/** Lots whose proofs are looked at for the day, the newest first: a proof run is a few devices. */
const LOTS_MAX = 20;

/** Live releases that the newest proofs contradict. */
export async function listFailedProofs(ctx: Ctx): Promise<TodayItem[]> {
  const items: TodayItem[] = [];
  for (const lot of await listLotsToProve(ctx.db, LOTS_MAX)) {
    const { live } = await listLotProofs(ctx, lot);
    if (live?.state === "differs") items.push(proofItem(lot, live));
  }
  return items;
}

/** A live release whose written devices do otherwise than their images predict. */
function proofItem(lot: string, { layout, firmware, differed, run, readAt }: FirstOff): TodayItem {
  return {
    kind: "lot",
    title: `Proof of ${lot}`,
    detail: `${formatCount(differed)} ${differed === 1 ? "device does" : "devices do"} otherwise than predicted · layout ${layout}, firmware ${firmware}`,
    who: null,
    at: readAt ?? new Date(0).toISOString(),
    tone: "bad",
    link: run ? `/runs/${run}` : `/lots/${encodeURIComponent(lot)}/writes`,
    digest: null,
  };
}
