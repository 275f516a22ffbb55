import { z } from "zod";
import { id, pageOf, timestamp } from "@/schemas/api/common";
import { coefficients } from "@/schemas/api/derivations";
import { finding } from "@/schemas/api/runs";

export const importQuery = z.object({
  referenceC: z.coerce.number().meta({ description: "Reference temperature that the values rest on, °C" }),
  capacityKg: z.coerce.number().positive().meta({ description: "Capacity that the values rest on, kg" }),
});

export const importQueryWithPreview = importQuery.extend({
  preview: z
    .enum(["true", "false"])
    .default("false")
    .meta({ description: "Judge the file, answer with its rows, errors and findings, and store nothing" }),
});

const rowError = z.object({ row: z.number().int(), column: z.string(), code: z.string(), message: z.string() });

export const importPreview = z.object({
  preview: z.literal(true),
  order: z.number().int(),
  devices: z.number().int().meta({ description: "Rows that could be taken" }),
  columns: z.array(z.string()),
  rows: z
    .array(z.object({ row: z.number().int(), cells: z.array(z.string()) }))
    .meta({ description: "As they stand in the file: the first ones, and those with an error" }),
  rowCount: z.number().int(),
  errors: z.array(rowError).meta({ description: "At most 200" }),
  errorCount: z.number().int(),
  findings: z.array(finding).meta({ description: "At most 1,000" }),
  findingCount: z.number().int(),
});

export type ImportPreview = z.output<typeof importPreview>;

export const newestSet = z.object({
  serial: z.string(),
  role: z.enum(["sample", "zero", "verification", "excluded", "imported"]),
  state: z.enum(["proposed", "approved", "refused", "stale", "revoked"]),
  coefficients,
  derivation: id,
  method: z.enum(["individual", "pooled-gain", "import"]),
  order: z.number().int(),
  derivedAt: timestamp,
});

export type NewestSet = z.output<typeof newestSet>;
export const newestSetPage = pageOf(newestSet);
