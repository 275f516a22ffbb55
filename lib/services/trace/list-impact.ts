import { type ImpactRow, type ImpactSource, isImpactSource as isThere, listImpact as query } from "@/db/queries/trace";
import { AppError } from "@/lib/errors";
import type { Ctx } from "@/lib/services/context";
import { type Page, pageOf } from "@/lib/services/page";

const SOURCES = ["run", "derivation", "layout", "package", "equipment"] as const;

/**
 * Serials that one thing reached, with the state each is in now.
 * @throws AppError `trace.source_missing` unless exactly one is named, `<noun>.not_found` where it is not there
 */
export async function listImpact(
  ctx: Ctx,
  input: ImpactSource & { limit: number; cursor?: string },
): Promise<Page<ImpactRow>> {
  const named = SOURCES.filter((source) => input[source] !== undefined);
  if (named.length !== 1)
    throw new AppError("trace.source_missing", {
      sources: SOURCES,
      message: `Name exactly one of ${SOURCES.join(", ")}.`,
    });
  const source = named[0] as (typeof SOURCES)[number];
  if (!(await isThere(ctx.db, source, input[source] as string)))
    throw new AppError(`${source}.not_found`, { [source]: input[source], message: `There is no such ${source}.` });
  const rows = await query(ctx.db, input, { after: input.cursor, limit: input.limit + 1 });
  return pageOf(rows, input.limit, (row) => row.serial);
}
