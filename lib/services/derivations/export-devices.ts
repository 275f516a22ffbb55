import { type SheetCell, writeXlsx } from "@/builders/spreadsheet/write-xlsx";
import { getDerivation } from "@/db/queries/derivations";
import type { Ctx } from "@/lib/services/context";
import { getLotRules } from "@/lib/services/lots/lot-rules";
import type { DerivationView } from "@/schemas/api/derivations";
import { type DeviceColumn, deviceColumns } from "./device-columns";
import { getDerivationView, listDerivedDevices } from "./get-derivation";

const PAGE = 1_000;

/**
 * Every device of a derivation as CSV (RFC 4180). Cells are numbers, serials, codes and words of ours: none has a comma, none can
 * begin as a formula does, so that a spreadsheet takes them for what they are. @throws AppError `derivation.not_found`
 */
export async function writeDevicesCsv(ctx: Ctx, id: string): Promise<string> {
  const { columns, rows } = await listCells(ctx, id);
  const line = (cells: readonly SheetCell[]) => `${cells.map((cell) => cell ?? "").join(",")}\r\n`;
  return line(columns.map(({ heading }) => heading)) + rows.map(line).join("");
}

/** The same as a workbook, with what it comes from on a second sheet. @throws AppError `derivation.not_found` */
export async function writeDevicesXlsx(ctx: Ctx, id: string): Promise<Buffer> {
  const { columns, rows } = await listCells(ctx, id);
  const view = await getDerivationView(ctx, id);
  return writeXlsx([
    { name: "Devices", headings: columns.map(({ heading }) => heading), rows },
    { name: "Derivation", headings: ["What", "Value"], rows: originRows(view) },
  ]);
}

async function listCells(ctx: Ctx, id: string): Promise<{ columns: DeviceColumn[]; rows: SheetCell[][] }> {
  const { rules } = await getLotRules(ctx.db, await getDerivation(ctx.db, id));
  const columns = deviceColumns(rules.intervals);
  const rows: SheetCell[][] = [];
  let cursor: string | undefined;
  do {
    const page = await listDerivedDevices(ctx, id, { limit: PAGE, cursor });
    for (const device of page.items) rows.push(columns.map(({ cell }) => cell(device)));
    cursor = page.next ?? undefined;
  } while (cursor !== undefined);
  return { columns, rows };
}

function originRows(view: DerivationView): SheetCell[][] {
  const { pooled } = view;
  return [
    ["derivation", view.id],
    ["SHA-256 of what it was computed from", view.sha256],
    ["lot", view.lot],
    ["family", view.family],
    ["family revision", view.revision],
    ["method", view.method],
    ["order", view.order],
    ["arithmetic", view.engine],
    ["state", view.state],
    ["made at", view.createdAt],
    ["made by", view.createdBy],
    ["proven from (°C)", view.provenRange?.[0] ?? null],
    ["proven to (°C)", view.provenRange?.[1] ?? null],
    ...(pooled
      ? [
          ["gainTc, mean of the sample (1/K)", pooled.gainTc],
          ["standard deviation (1/K)", pooled.sd],
          ["sample devices", pooled.n],
          ["tolerance interval from (1/K)", pooled.toleranceInterval?.[0] ?? null],
          ["tolerance interval to (1/K)", pooled.toleranceInterval?.[1] ?? null],
          ["pooling limit, ± (1/K)", pooled.limit],
          ["verdict", pooled.verdict],
        ]
      : []),
    ...view.runs.map((run) => [`${run.purpose} run, SHA-256`, run.sha256]),
    ...view.exclude.map((one) => [`${one.serial} excluded`, one.reason]),
    ["note", "gainTc is the correction, zeroTc the drift. A class is proven by type approval, not here."],
  ] as SheetCell[][];
}
