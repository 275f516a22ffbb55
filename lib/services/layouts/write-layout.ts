import type { Trx } from "@/db/executor";
import { type FamilyRow, getFamily, lockFamily } from "@/db/queries/families";
import {
  deleteLayout,
  insertLayout,
  type LayoutRow,
  listLayouts,
  lockLayout,
  updateLayout,
} from "@/db/queries/layouts";
import { insertMakers, listMakers } from "@/db/queries/makers";
import { listPersonNames } from "@/db/queries/person-names";
import { AppError } from "@/lib/errors";
import { assertRole, type PersonCtx } from "@/lib/services/context";
import { documentDigest } from "@/lib/services/families/document-digest";
import { assertState } from "@/lib/services/families/publishing";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { getValidLayout } from "./lint-document";

export interface LayoutKey {
  family: string;
  version: string;
}

/** A document as its author wrote it, and as read from that. */
export interface WrittenLayout {
  source: string;
  document: unknown;
}

/** The family, locked: versions are given and steps judged under this lock. @throws AppError `family.not_found` */
export async function lockFamilyOf(trx: Trx, codeOrId: string): Promise<FamilyRow> {
  const { id } = await getFamily(trx, codeOrId);
  return lockFamily(trx, id);
}

/**
 * Adds a layout as a draft.
 * @throws AppError `family.not_found`, `layout.exists`, `layout.invalid` {errors, warnings}
 */
export async function addLayout(ctx: PersonCtx, input: { family: string } & WrittenLayout): Promise<LayoutKey> {
  assertRole(ctx, "engineer");
  return ctx.db.transaction().execute(async (trx) => {
    const family = await lockFamilyOf(trx, input.family);
    await assertVersionFree(trx, family, input.document);
    const { layout: document, step } = await getValidLayout(trx, family, input.document);
    const at = ctx.now();
    const by = ctx.actor.id;
    const sha256 = documentDigest(document);
    const written = { version: document.version, source: input.source, document, sha256, draftNumber: 1, step };
    const made = { createdAt: at, createdBy: by, updatedAt: at, updatedBy: by };
    const id = ctx.newId();
    await insertLayout(trx, { id, familyId: family.id, ...written, ...made });
    await addWriter(ctx, trx, id);
    const data = { family: family.code, version: document.version, step, sha256: sha256.toString("hex") };
    await appendEvent(ctx, trx, { action: "layout.drafted", subject: id, data });
    return { family: family.code, version: document.version };
  });
}

/** A version that is taken is a conflict even where the rules would also have called it one. */
async function assertVersionFree(trx: Trx, family: FamilyRow, document: unknown): Promise<void> {
  const version =
    typeof document === "object" && document !== null && "version" in document ? document.version : undefined;
  if (!(await listLayouts(trx, family.id)).some((layout) => layout.version === version)) return;
  throw new AppError("layout.exists", {
    version,
    message: `${family.code} has a layout ${version} already; write another version.`,
  });
}

/**
 * Saves a draft anew.
 * @param input.draft the number of the draft that was edited; left out, the save wins whatever stands there.
 * @throws AppError `layout.not_found`, `layout.wrong_state`, `layout.draft_changed`, `layout.version_differs`, `layout.invalid`
 */
export async function saveLayout(ctx: PersonCtx, input: LayoutKey & WrittenLayout & { draft?: number }): Promise<void> {
  assertRole(ctx, "engineer");
  await ctx.db.transaction().execute(async (trx) => {
    const family = await lockFamilyOf(trx, input.family);
    const before = await lockLayout(trx, family.id, input.version);
    assertState("layout", before.state, "draft");
    await assertSameDraft(trx, before, input.draft);
    const { layout: document, step } = await getValidLayout(trx, family, input.document);
    if (document.version !== before.version) {
      const message = `This is the draft of ${before.version}; add ${document.version} as a layout of its own.`;
      throw new AppError("layout.version_differs", {
        errors: [{ path: "/version", code: "layout.version_differs", message }],
        message,
      });
    }
    const sha256 = documentDigest(document);
    const draftNumber = before.draftNumber + 1;
    const change = {
      source: input.source,
      document,
      sha256,
      step,
      draftNumber,
      unfinished: false,
      updatedAt: ctx.now(),
      updatedBy: ctx.actor.id,
    };
    await updateLayout(trx, before.id, change);
    await addWriter(ctx, trx, before.id);
    const data = {
      family: family.code,
      version: before.version,
      draft: draftNumber,
      step,
      sha256: sha256.toString("hex"),
    };
    await appendEvent(ctx, trx, { action: "layout.saved", subject: before.id, data });
  });
}

/** @throws AppError `layout.draft_changed` {draft, now, source, updatedBy, updatedAt}: the text that stands there, so that none is lost. */
export async function assertSameDraft(trx: Trx, layout: LayoutRow, draft: number | undefined): Promise<void> {
  if (draft === undefined || draft === layout.draftNumber) return;
  const { source, updatedAt, draftNumber: now } = layout;
  const updatedBy = (await listPersonNames(trx, [layout.updatedBy])).get(layout.updatedBy) ?? "";
  const message = `${updatedBy} saved this draft meanwhile; put the two texts together and save over draft ${now}.`;
  throw new AppError("layout.draft_changed", {
    draft,
    now,
    source,
    updatedBy,
    updatedAt: updatedAt.toISOString(),
    message,
  });
}

/** Everyone who ever wrote a draft counts as its maker, once. @returns whether the person is a new one. */
export async function addWriter(ctx: PersonCtx, trx: Trx, layoutId: string): Promise<boolean> {
  const personId = ctx.actor.id;
  const makers = await listMakers(trx, "layout", layoutId);
  if (makers.some((maker) => maker.personId === personId)) return false;
  await insertMakers(trx, [
    { id: ctx.newId(), subjectKind: "layout", subjectId: layoutId, personId, act: "wrote", at: ctx.now() },
  ]);
  return true;
}

/** Drops a draft; its version is free again. @throws AppError `layout.not_found`, `layout.wrong_state` */
export async function dropLayout(ctx: PersonCtx, key: LayoutKey): Promise<void> {
  assertRole(ctx, "engineer");
  await ctx.db.transaction().execute(async (trx) => {
    const family = await lockFamilyOf(trx, key.family);
    const layout = await lockLayout(trx, family.id, key.version);
    assertState("layout", layout.state, "draft");
    await deleteLayout(trx, layout.id);
    const data = { family: family.code, version: key.version, sha256: layout.sha256.toString("hex") };
    await appendEvent(ctx, trx, { action: "layout.dropped", subject: layout.id, data });
  });
}
