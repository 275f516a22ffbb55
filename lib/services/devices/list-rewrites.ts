import { getLot } from "@/db/queries/lots";
import { findLivePackage } from "@/db/queries/packages";
import type { Ctx } from "@/lib/services/context";
import type { Page } from "@/lib/services/page";
import { type Carried, listCarriedImages } from "./carried-image";

export interface Rewrite {
  serial: string;
  why: "never-written" | "unknown" | "other-values";
  carries: string | null;
  held: boolean;
  shipped: boolean;
  lastOutcome: string | null;
  writtenAt: string | null;
  station: string | null;
}

const SCAN_ROWS = 1000;

/**
 * Devices of a lot whose deciding record is not a verified image equal in values to the live one: the re-write list.
 * Scrapped devices and devices without an image in the live package are not on it.
 * @throws AppError `lot.not_found`
 */
export async function listRewrites(
  ctx: Ctx,
  input: { lot: string; limit: number; cursor?: string },
): Promise<Page<Rewrite>> {
  const lot = await getLot(ctx.db, input.lot);
  if (!(await findLivePackage(ctx.db, lot.id))) return { items: [], next: null };
  const items: Rewrite[] = [];
  let after = input.cursor;
  for (;;) {
    const rows = await listCarriedImages(ctx, { lotId: lot.id, after, limit: SCAN_ROWS });
    for (const row of rows) {
      const why = reasonToRewrite(row);
      if (why) items.push(rewriteOf(row, why));
      if (items.length > input.limit) {
        const shown = items.slice(0, input.limit);
        return { items: shown, next: shown.at(-1)?.serial ?? null };
      }
    }
    after = rows.at(-1)?.serial;
    if (rows.length < SCAN_ROWS) return { items, next: null };
  }
}

function reasonToRewrite(row: Carried): Rewrite["why"] | null {
  if (row.scrapped || !row.inLive) return null;
  if (!row.last) return "never-written";
  if (!row.known) return "unknown";
  return row.sameValuesAsLive === true ? null : "other-values";
}

function rewriteOf(row: Carried, why: Rewrite["why"]): Rewrite {
  const { serial, held, shipped, last } = row;
  return {
    serial,
    why,
    carries: row.known ? (last?.version ?? null) : null,
    held,
    shipped,
    lastOutcome: last?.outcome ?? null,
    writtenAt: last?.finishedAt ?? null,
    station: last?.station ?? null,
  };
}
