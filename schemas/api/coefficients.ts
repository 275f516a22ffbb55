import { z } from "zod";
import { id, pageOf, timestamp } from "@/schemas/api/common";
import { coefficients } from "@/schemas/api/derivations";

export const importQuery = z.object({
  referenceC: z.coerce.number().meta({ description: "Reference temperature that the values rest on, °C" }),
  capacityKg: z.coerce.number().positive().meta({ description: "Capacity that the values rest on, kg" }),
});

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
