import { listNewestSets, type NewestSetRow } from "@/db/queries/coefficients";
import { getLot } from "@/db/queries/lots";
import type { Ctx } from "@/lib/services/context";
import { type Page, pageOf } from "@/lib/services/page";
import type { NewestSet } from "@/schemas/api/coefficients";
import type { PageQuery } from "@/schemas/api/common";

/** The newest set of each device of a lot, by serial. @throws AppError `lot.not_found` */
export async function listLotCoefficients(ctx: Ctx, lot: string, page: PageQuery): Promise<Page<NewestSet>> {
  const { id } = await getLot(ctx.db, lot);
  const found = await listNewestSets(ctx.db, id, { after: page.cursor, limit: page.limit + 1 });
  const { items, next } = pageOf(found, page.limit, (row) => row.serial);
  return { items: items.map(viewOf), next };
}

function viewOf(row: NewestSetRow): NewestSet {
  const { serial, role, state, coefficients, method, order } = row;
  const derived = { derivation: row.derivationId, method, order, derivedAt: row.derivationCreatedAt.toISOString() };
  return { serial, role, state, coefficients, ...derived };
}

/** Devices read at a time: bounds how long the event loop is held. */
const ROWS_A_PAGE = 2_000;

const VALUES = ["tempOffset", "tempSlope", "zero", "zeroTc", "gain", "gainTc", "zeroTc2", "gainTc2"] as const;

/**
 * The newest sets of a lot as CSV, all of them, numbers in full. Every cell is a number, a serial, a word of ours or a UUID,
 * so that none can be taken for a formula or needs quotation marks.
 * @throws AppError `lot.not_found`
 */
export async function writeLotCoefficientsCsv(ctx: Ctx, lot: string): Promise<string> {
  const { id } = await getLot(ctx.db, lot);
  const parts = [`${["serial", ...VALUES, "state", "role", "order", "derivation"].join(",")}\n`];
  // All pages show the lot at one moment, whatever is derived or decided meanwhile.
  const reading = ctx.db.transaction().setIsolationLevel("repeatable read").setAccessMode("read only");
  await reading.execute(async (trx) => {
    for (let after: string | undefined, more = true; more; ) {
      const rows = await listNewestSets(trx, id, { after, limit: ROWS_A_PAGE });
      parts.push(rows.map(csvLine).join(""));
      after = rows.at(-1)?.serial;
      more = rows.length === ROWS_A_PAGE;
    }
  });
  return parts.join("");
}

function csvLine({ serial, coefficients, state, role, order, derivationId }: NewestSetRow): string {
  const values = VALUES.map((name) => coefficients[name] ?? "");
  return `${[serial, ...values, state, role, order, derivationId].join(",")}\n`;
}
