import type { PersonCtx } from "@/lib/services/context";
import { SHOWN_MAX } from "@/lib/services/derivations/preview-view";
import type { ImportPreview } from "@/schemas/api/coefficients";
import { type ImportInput, planImport } from "./plan-import";

/** First rows shown whatever they hold, and how many rows with an error besides. */
const FIRST_ROWS = 8;
const ERROR_ROWS_MAX = 60;

/**
 * What an import would take, with the cells as they stand in the file, so that errors can be shown in place; nothing is stored.
 * @throws AppError `lot.not_found`, `coefficients.reference_differs`
 */
export async function previewImport(ctx: PersonCtx, input: ImportInput): Promise<ImportPreview> {
  const { parsed, findings, errors, errorCount } = await planImport(ctx, input);
  const [header, ...records] = parsed.records;
  const wrong = new Set(errors.map(({ row }) => row).slice(0, ERROR_ROWS_MAX));
  const shown = records.filter(({ line }, index) => index < FIRST_ROWS || wrong.has(line));
  return {
    preview: true,
    order: parsed.order,
    devices: parsed.sets.length,
    columns: header?.record ?? [],
    rows: shown.map(({ line, record }) => ({ row: line, cells: record })),
    rowCount: records.length,
    errors,
    errorCount,
    findings: findings.slice(0, SHOWN_MAX).map((one) => ({ ...one, id: ctx.newId() })),
    findingCount: findings.length,
  };
}
