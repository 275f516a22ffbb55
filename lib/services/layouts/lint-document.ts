import { joinShape, type LintOptions, type LintResult, lintLayout } from "@/builders/codec/lint/lint";
import type { Db } from "@/db/executor";
import { findSerialLengthMax } from "@/db/queries/devices";
import { type FamilyRow, findNewestPublishedRevision, getFamily, listFamilyRevisions } from "@/db/queries/families";
import { listPublishedLayoutDocuments } from "@/db/queries/layouts";
import { AppError } from "@/lib/errors";
import { assertRole, type Ctx, type PersonCtx } from "@/lib/services/context";
import { type LayoutDocument, parseLayout } from "@/schemas/documents/layout";

/** What a family's layouts are judged against: its newest published values (else the newest), its published layouts, its serials. */
async function getLintBasis(
  db: Db,
  family: FamilyRow,
): Promise<Required<Omit<LintOptions, "family" | "draftVersion">> & LintOptions> {
  const revision = (await findNewestPublishedRevision(db, family.id)) ?? (await listFamilyRevisions(db, family.id))[0];
  return {
    family: revision && { ...revision.document, code: family.code },
    publishedVersions: await listPublishedLayoutDocuments(db, family.id),
    existingSerialLengthMax: await findSerialLengthMax(db, family.id),
  };
}

export type LintBasis = Awaited<ReturnType<typeof getLintBasis>>;

/** The same for the editor, which judges while a document is written. @throws AppError `family.not_found` */
export async function getEditorBasis(ctx: Ctx, family: string): Promise<LintBasis> {
  return getLintBasis(ctx.db, await getFamily(ctx.db, family));
}

/** A document judged by its schema and by its meaning, within its family. Never throws for what is wrong with it. */
export async function lintForFamily(
  db: Db,
  family: FamilyRow,
  document: unknown,
  options: Pick<LintOptions, "draftVersion"> = {},
): Promise<LintResult & { layout?: LayoutDocument }> {
  const { layout, problems = [] } = parseLayout(document);
  return { ...joinShape(problems, lintLayout(document, { ...(await getLintBasis(db, family)), ...options })), layout };
}

/** What a document's author should know before asking for publishing. @throws AppError `family.not_found` */
export async function lintDocument(ctx: PersonCtx, input: { family: string; document: unknown }): Promise<LintResult> {
  assertRole(ctx, "engineer", "reviewer");
  return lintForFamily(ctx.db, await getFamily(ctx.db, input.family), input.document);
}

/** The document typed, if nothing stands against it. @throws AppError `layout.invalid` {errors, warnings, step} */
export async function getValidLayout(
  db: Db,
  family: FamilyRow,
  document: unknown,
): Promise<Pick<LintResult, "step"> & { layout: LayoutDocument }> {
  const { layout, errors, warnings, step } = await lintForFamily(db, family, document);
  const [first] = errors;
  if (first || !layout) {
    const message = first ? `${first.path || "The document"}: ${first.message}` : "The document is no layout.";
    throw new AppError("layout.invalid", { errors, warnings, step, message });
  }
  return { layout, step };
}
