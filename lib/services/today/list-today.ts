import * as query from "@/db/queries/today";
import { listAwaited } from "@/db/queries/today-awaited";
import { READERS, type Role } from "@/lib/domain/roles";
import type { PersonCtx } from "@/lib/services/context";
import type { Today } from "@/schemas/api/today";
import { listFailedProofs } from "./failed-proofs";
import { listLotSteps } from "./lot-steps";
import { listPlannedRuns } from "./planned-runs";
import * as item from "./today-items";

/** Entries of a list at most: more than that is not looked at in a day. */
const SHOWN_MAX = 50;
const LOTS_SHOWN = 8;
const TROUBLE_DAYS = 7;
const DAY_MS = 24 * 60 * 60 * 1000;

/** What waits for a person, by the roles they hold and by what they made themselves. */
export async function listToday(ctx: PersonCtx): Promise<Today> {
  const { db, actor } = ctx;
  const holds = (...roles: Role[]) => roles.some((role) => actor.roles.includes(role));
  const reads = holds(...READERS);
  const since = new Date(ctx.now().getTime() - TROUBLE_DAYS * DAY_MS);
  return {
    decide: holds("reviewer") ? (await query.listToDecide(db, actor.id, SHOWN_MAX)).map(item.decideItem) : [],
    release: holds("engineer", "reviewer") ? (await query.listToRelease(db, SHOWN_MAX)).map(item.releaseItem) : [],
    awaited: holds("engineer", "reviewer") ? (await listAwaited(db, actor.id, SHOWN_MAX)).map(item.awaitedItem) : [],
    own: holds("engineer") ? (await query.listOwnWork(db, actor.id, SHOWN_MAX)).map(item.ownItem) : [],
    planned: holds("engineer") ? await listPlannedRuns(ctx, SHOWN_MAX) : [],
    trouble: reads
      ? [
          ...(await listFailedProofs(ctx)),
          ...(await query.listTroubleWrites(db, since, SHOWN_MAX)).map(item.troubleItem),
        ]
      : [],
    held: reads ? (await query.listHeldDevices(db, SHOWN_MAX)).map((row) => item.heldItem(row, actor.id)) : [],
    people: holds("admin") ? (await query.listGrantsToConfirm(db, actor.id, SHOWN_MAX)).map(item.roleItem) : [],
    lots: reads ? await listLotSteps(ctx, LOTS_SHOWN) : [],
    live: holds("operator") ? (await query.listLiveReleases(db, SHOWN_MAX)).map(item.liveItem) : [],
  };
}
