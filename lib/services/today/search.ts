import * as query from "@/db/queries/search";
import { READERS } from "@/lib/domain/roles";
import { readSearchText } from "@/lib/domain/search-text";
import type { PersonCtx } from "@/lib/services/context";
import type { SearchItem } from "@/schemas/api/today";

/**
 * Serials, lots, families and packages that a text may mean, what it names exactly first. Who is no reader, as an operator, finds
 * serials and released packages only.
 */
export async function search(ctx: PersonCtx, input: { q: string; limit: number }): Promise<SearchItem[]> {
  const reads = READERS.some((role) => ctx.actor.roles.includes(role));
  const { code } = readSearchText(input.q);
  const { db } = ctx;
  const devices = (await query.searchDevices(db, code, input.limit)).map((row) => deviceItem(row, code));
  const lots = reads ? (await query.searchLots(db, code, input.limit)).map((row) => codeItem("lot", row, code)) : [];
  const families = reads
    ? (await query.searchFamilies(db, code, input.limit)).map((row) => codeItem("family", row, code))
    : [];
  const packages = await findPackages(ctx, input, !reads);
  const found = [...devices, ...lots, ...families, ...packages];
  return [...found.filter((item) => item.exact), ...found.filter((item) => !item.exact)].slice(0, input.limit);
}

function deviceItem(row: query.FoundDevice, code: string): SearchItem {
  return {
    kind: "device",
    title: row.serial,
    detail: `${row.family} · ${row.lot}`,
    link: `/trace/${encodeURIComponent(row.serial)}`,
    exact: row.serial === code,
  };
}

function codeItem(kind: "lot" | "family", row: query.FoundCode, code: string): SearchItem {
  const link = `/${kind === "lot" ? "lots" : "families"}/${encodeURIComponent(row.code)}`;
  return { kind, title: row.code, detail: row.detail, link, exact: row.code === code };
}

async function findPackages(
  ctx: PersonCtx,
  { q, limit }: { q: string; limit: number },
  releasedOnly: boolean,
): Promise<SearchItem[]> {
  const meaning = readSearchText(q);
  const rows: query.FoundPackage[] = [];
  if (meaning.package) rows.push(...(await query.searchPackages(ctx.db, { ...meaning.package, limit, releasedOnly })));
  if (meaning.digest)
    rows.push(...(await query.searchPackages(ctx.db, { digest: meaning.digest, limit, releasedOnly })));
  // One package is as good as named, be it by its lot and version, its digest or its seal.
  return rows.map((row) => ({
    kind: "package",
    title: `${row.lot} ${row.version}`,
    detail: row.state,
    link: `/packages/${row.id}`,
    exact: rows.length === 1,
  }));
}
