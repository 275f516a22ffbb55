import type { Ctx } from "@/lib/services/context";
import type { ComparedDevice, ComparisonExportQuery } from "@/schemas/api/compare";
import { getComparisonOverview } from "./compare-packages";
import { indexOf, selectedOf } from "./known-indexes";
import { compareSerials, selectionOf } from "./list-changed-serials";
import { openTwoPackages } from "./two-packages";

/** Serials compared for one piece of the file: a piece is made when the client takes it. */
const SERIALS_A_PIECE = 1_000;
const HEADER = "serial,change,field,unit,from,to,steps,bytes_changed";

export interface ExportedComparison {
  fileName: string;
  pieces: AsyncGenerator<string>;
}

/**
 * The serials that a selection of a comparison holds, in its order, as one file: CSV with a line for each field that differs,
 * or JSON with the overview before the serials.
 * @throws AppError `package.not_found`, `package.not_built`
 */
export async function exportComparison(ctx: Ctx, query: ComparisonExportQuery): Promise<ExportedComparison> {
  const { format, from, to } = query;
  const two = await openTwoPackages(ctx, from, to);
  const index = await indexOf(ctx, two);
  const places = await selectedOf(ctx, two, selectionOf({ ...query, offset: 0, limit: 1 }));
  const parts = async function* (): AsyncGenerator<ComparedDevice[]> {
    for (let at = 0; at < places.length; at += SERIALS_A_PIECE) {
      const serials = places.slice(at, at + SERIALS_A_PIECE).map((place) => index.serials[place] as string);
      yield await compareSerials(ctx, two, serials);
    }
  };
  const { pkg: older } = two.from;
  const { pkg: newer } = two.to;
  const name = `${newer.lotCode}-${older.lotCode === newer.lotCode ? "" : `${older.lotCode}-`}${older.version}-to-${newer.version}`;
  const text = format === "csv" ? csvOf(parts()) : jsonOf(await getComparisonOverview(ctx, { from, to }), parts());
  return { fileName: `${name}.${format}`, pieces: text };
}

async function* csvOf(parts: AsyncIterable<ComparedDevice[]>): AsyncGenerator<string> {
  yield `${HEADER}\n`;
  for await (const devices of parts) yield devices.map(linesOf).join("");
}

function linesOf({ serial, change, fields, bytes }: ComparedDevice): string {
  const changed = change === "added" || change === "removed" ? "" : bytes.length;
  return fields
    .map(({ name, unit, from, to, steps }) => {
      const values = [name, unit, from, to, steps].map(cell);
      return `${[serial, change, ...values, changed].join(",")}\n`;
    })
    .join("");
}

/** A number at full precision; a text that a spreadsheet would take for a formula is quoted with an apostrophe before it. */
function cell(value: string | number | null): string {
  if (value === null) return "";
  if (typeof value === "number") return String(value);
  const text = /^[=+\-@\t\r]/.test(value) ? `'${value}` : value;
  return /[",\n\r']/.test(text) ? `"${text.replaceAll('"', '""')}"` : text;
}

async function* jsonOf(overview: object, parts: AsyncIterable<ComparedDevice[]>): AsyncGenerator<string> {
  yield `${JSON.stringify(overview).slice(0, -1)},"items":[`;
  let first = true;
  for await (const devices of parts) {
    yield (first ? "" : ",\n") + devices.map((device) => JSON.stringify(device)).join(",\n");
    first = false;
  }
  yield "]}\n";
}
