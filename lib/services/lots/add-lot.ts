import { findNewestPublishedRevision, getFamily } from "@/db/queries/families";
import { insertLot } from "@/db/queries/lots";
import { AppError } from "@/lib/errors";
import { assertRole, type PersonCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import type { NewLot } from "@/schemas/api/lots";

/**
 * Adds a lot of a family and pins the family's newest published revision.
 * @throws AppError `family.not_found`, `family.no_published_revision`, `lot.exists`, `auth.forbidden`
 */
export async function addLot(ctx: PersonCtx, input: NewLot): Promise<string> {
  assertRole(ctx, "engineer");
  return ctx.db.transaction().execute(async (trx) => {
    const family = await getFamily(trx, input.family);
    const revision = await findNewestPublishedRevision(trx, family.id);
    if (!revision) {
      const message = `${family.code} has no published revision yet; a second person publishes its values first.`;
      throw new AppError("family.no_published_revision", { family: family.code, message });
    }
    const id = ctx.newId();
    const { code, firmware } = input;
    const pinned = { familyId: family.id, familyRevisionId: revision.id };
    await insertLot(trx, { id, code, firmware, ...pinned, createdAt: ctx.now(), createdBy: ctx.actor.id });
    const data = {
      family: family.code,
      revision: revision.number,
      revisionSha256: revision.sha256.toString("hex"),
      firmware,
    };
    await appendEvent(ctx, trx, { action: "lot.created", subject: code, data });
    return code;
  });
}
