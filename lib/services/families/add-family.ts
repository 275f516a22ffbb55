import type { Trx } from "@/db/executor";
import { getFamily, insertFamily, insertFamilyRevision, listFamilyRevisions, lockFamily } from "@/db/queries/families";
import { insertMakers } from "@/db/queries/makers";
import { AppError } from "@/lib/errors";
import { assertRole, type PersonCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import type { FamilyDocument } from "@/schemas/api/families";
import { documentDigest } from "./document-digest";

export interface AddedRevision {
  familyId: string;
  number: number;
}

/** Adds a family with revision 1 as a draft. @throws AppError `family.exists`, `auth.forbidden` */
export async function addFamily(ctx: PersonCtx, document: FamilyDocument): Promise<AddedRevision> {
  assertRole(ctx, "engineer");
  const { code } = document;
  return ctx.db.transaction().execute(async (trx) => {
    const familyId = ctx.newId();
    await insertFamily(trx, { id: familyId, code, createdAt: ctx.now(), createdBy: ctx.actor.id });
    const sha256 = await addRevision(ctx, trx, { familyId, number: 1, document });
    await appendEvent(ctx, trx, {
      action: "family.created",
      subject: code,
      data: { family: familyId, revision: 1, sha256 },
    });
    return { familyId, number: 1 };
  });
}

/**
 * Adds the family's next revision as a draft; the ones before stay as they are.
 * @throws AppError `family.not_found`, `family.code_differs`, `auth.forbidden`
 */
export async function addFamilyRevision(
  ctx: PersonCtx,
  input: { family: string; document: FamilyDocument },
): Promise<AddedRevision> {
  assertRole(ctx, "engineer");
  const { document } = input;
  return ctx.db.transaction().execute(async (trx) => {
    const { id: familyId, code } = await getFamily(trx, input.family);
    await lockFamily(trx, familyId);
    if (document.code !== code) {
      const message = `The values are for ${document.code}, the family is ${code}. A family keeps its code.`;
      throw new AppError("family.code_differs", {
        errors: [{ path: "/code", code: "family.code_differs", message }],
        message,
      });
    }
    const revisions = await listFamilyRevisions(trx, familyId);
    const number = (revisions[0]?.number ?? 0) + 1;
    const sha256 = await addRevision(ctx, trx, { familyId, number, document });
    await appendEvent(ctx, trx, {
      action: "revision.drafted",
      subject: code,
      data: { family: familyId, revision: number, sha256 },
    });
    return { familyId, number };
  });
}

async function addRevision(
  ctx: PersonCtx,
  trx: Trx,
  revision: AddedRevision & { document: FamilyDocument },
): Promise<string> {
  const id = ctx.newId();
  const at = ctx.now();
  const sha256 = documentDigest(revision.document);
  await insertFamilyRevision(trx, { ...revision, id, sha256, createdAt: at, createdBy: ctx.actor.id });
  await insertMakers(trx, [
    { id: ctx.newId(), subjectKind: "family-revision", subjectId: id, personId: ctx.actor.id, act: "wrote", at },
  ]);
  return sha256.toString("hex");
}
