import { READERS } from "@/lib/domain/roles";
import { importCoefficients } from "@/lib/services/coefficients/import-coefficients";
import { listLotCoefficients, writeLotCoefficientsCsv } from "@/lib/services/coefficients/list-coefficients";
import { previewImport } from "@/lib/services/coefficients/preview-import";
import { importPreview, importQueryWithPreview, newestSetPage } from "@/schemas/api/coefficients";
import { byCode, pageQuery } from "@/schemas/api/common";
import { derivation } from "@/schemas/api/derivations";
import { chooseMediaType } from "../accept";
import { command } from "../command";

/** 60,000 devices with eight values of 25 characters. */
const IMPORT_MAX_BYTES = 16 * 1024 * 1024;

export const importSets = command({
  id: "coefficients.import",
  method: "POST",
  path: "/lots/{code}/coefficients",
  summary:
    "Import coefficients as a derivation with method import; with ?preview=true answers 200 with rows, errors and findings and stores nothing",
  access: { who: "person", roles: ["engineer"] },
  params: byCode,
  query: importQueryWithPreview,
  body: { upload: { contentTypes: ["text/csv"], maxBytes: IMPORT_MAX_BYTES } },
  reply: { status: 201, schema: derivation },
  errors: ["lot.not_found", "coefficients.reference_differs", "coefficients.invalid"],
  idempotent: true,
  handle: async (ctx, { params, query, body }) => {
    const { referenceC, capacityKg } = query;
    const input = { lot: params.code, referenceC, capacityKg, bytes: body.bytes };
    if (query.preview !== "true") return importCoefficients(ctx, input);
    const preview = importPreview.parse(await previewImport(ctx, input));
    return Response.json(preview, { headers: { "cache-control": "no-store" } });
  },
});

export const listCoefficients = command({
  id: "coefficients.list",
  method: "GET",
  path: "/lots/{code}/coefficients",
  summary: "The newest coefficients of each device with their state; as text/csv all of them at once",
  access: { who: "person", roles: READERS },
  params: byCode,
  query: pageQuery,
  reply: { status: 200, schema: newestSetPage, mediaTypes: ["application/json", "text/csv"] },
  errors: ["lot.not_found", "request.not_acceptable"],
  handle: async (ctx, { params, query, headers }) => {
    if (chooseMediaType(headers, ["application/json", "text/csv"]) === "application/json") {
      return listLotCoefficients(ctx, params.code, query);
    }
    return new Response(await writeLotCoefficientsCsv(ctx, params.code), {
      headers: {
        "content-type": "text/csv; charset=utf-8",
        "content-disposition": `attachment; filename="${params.code}-coefficients.csv"`,
        "cache-control": "no-store",
        vary: "accept",
      },
    });
  },
});

export const coefficientCommands = [importSets, listCoefficients];
