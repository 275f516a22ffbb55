import type { z } from "zod";
import { getFamily } from "@/db/queries/families";
import { getStoredText } from "@/db/queries/layouts";
import type { Ctx } from "@/lib/services/context";
import type { storedText } from "@/schemas/api/layouts";
import type { LayoutKey } from "./write-layout";

export type StoredText = z.output<typeof storedText>;

/**
 * A layout's text and who saved it, asked often by an editor that stands open.
 * @param input.known number of the draft whose text the reader has: it is not sent again.
 * @throws AppError `family.not_found`, `layout.not_found`
 */
export async function getDraftText(ctx: Ctx, input: LayoutKey & { known?: number }): Promise<StoredText> {
  const { id } = await getFamily(ctx.db, input.family);
  const row = await getStoredText(ctx.db, id, input.version, input.known);
  return {
    state: row.state,
    draft: row.draftNumber,
    unfinished: row.unfinished,
    updatedAt: row.updatedAt.toISOString(),
    updatedBy: row.updatedByName,
    submittedAt: row.submittedAt?.toISOString() ?? null,
    submittedBy: row.submittedByName,
    source: row.source,
  };
}
