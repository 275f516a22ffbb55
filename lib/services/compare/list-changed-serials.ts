import { listImageBytes } from "@/db/queries/images";
import type { SerialSelection } from "@/lib/domain/comparison/select-serials";
import type { Ctx } from "@/lib/services/context";
import type { ChangedSerials, ChangedSerialsQuery, ComparedDevice } from "@/schemas/api/compare";
import { findIndex, indexOf, selectedOf } from "./known-indexes";
import { differenceOf, eachDifference, openTwoPackages, type TwoPackages } from "./two-packages";

/** So far from the start a part in the order of serials is found faster by walking than by waiting for the index. */
const WALKED_MAX = 1_000;

/**
 * Serials that differ between two packages, any part of them in any order. The first ones by serial come at once, without
 * waiting for what is known only after all were compared: the total is then null.
 * @throws AppError `package.not_found`, `package.not_built`
 */
export async function listChangedSerials(ctx: Ctx, query: ChangedSerialsQuery): Promise<ChangedSerials> {
  const two = await openTwoPackages(ctx, query.from, query.to);
  if (!findIndex(two) && isPlainStart(query)) {
    const items = await walk(ctx, two, query);
    return { total: null, offset: query.offset, items };
  }
  const index = await indexOf(ctx, two);
  const places = await selectedOf(ctx, two, selectionOf(query));
  const serials = places.slice(query.offset, query.offset + query.limit).map((at) => index.serials[at] as string);
  return { total: places.length, offset: query.offset, items: await compareSerials(ctx, two, serials) };
}

/** What the query selects, without the part of it. */
export function selectionOf({ change, field, least, search, sort }: ChangedSerialsQuery): SerialSelection {
  const descending = sort.startsWith("-");
  return { change, field, least, search: search || undefined, sort: sort.replace(/^-/, ""), descending };
}

function isPlainStart({ change, field, search, sort, offset, limit }: ChangedSerialsQuery): boolean {
  return sort === "serial" && !change && !field && !search && offset + limit <= WALKED_MAX;
}

async function walk(ctx: Ctx, two: TwoPackages, { offset, limit }: ChangedSerialsQuery): Promise<ComparedDevice[]> {
  const items: ComparedDevice[] = [];
  let before = 0;
  for await (const { change, ...device } of eachDifference(ctx, two, { size: offset + limit })) {
    if (change === "same" || before++ < offset) continue;
    items.push({ ...device, change });
    if (items.length === limit) break;
  }
  return items;
}

/** The serials compared once more, in their order. */
export async function compareSerials(
  ctx: Ctx,
  two: TwoPackages,
  serials: readonly string[],
): Promise<ComparedDevice[]> {
  const olds = await listImageBytes(ctx.db, two.from.pkg.id, serials);
  const news = await listImageBytes(ctx.db, two.to.pkg.id, serials);
  const row = (serial: string, images: ReadonlyMap<string, Buffer>) => {
    const bytes = images.get(serial);
    return bytes && { serial, bytes };
  };
  return serials.map(
    (serial) => differenceOf(two, { serial, from: row(serial, olds), to: row(serial, news) }) as ComparedDevice,
  );
}
