import { z } from "zod";

/** Serials and codes: trimmed and upper-cased once at entry, unique everywhere and for ever. */
export const code = z
  .string()
  .transform((text) => text.trim().toUpperCase())
  .pipe(
    z
      .string()
      .regex(
        /^[A-Z0-9][A-Z0-9._-]{0,31}$/,
        "Takes 1 to 32 of A–Z, 0–9, dot, hyphen and underscore, starting with a letter or digit.",
      ),
  )
  .meta({ description: "Serial or code: [A-Z0-9][A-Z0-9._-]{0,31}, upper-cased at entry", example: "MW20-2609" });

export const id = z.uuid().meta({ description: "UUID" });
export const sha256Hex = z
  .string()
  .regex(/^[0-9a-f]{64}$/)
  .meta({ description: "SHA-256 as lower-case hex" });
export const version = z.string().regex(/^(0|[1-9]\d*)\.(0|[1-9]\d*)\.(0|[1-9]\d*)$/, "Takes a version such as 1.0.0.");
export const timestamp = z.iso.datetime().meta({ description: "RFC 3339, UTC, milliseconds" });
export const reason = z.string().trim().min(1, "Say why.").max(2000);
export const password = z.string().min(1, "Enter your password again.").max(1000);
export const oneTimeCode = z
  .string()
  .regex(/^\d{6}$/, "Six digits.")
  .optional();

/** Members that sign a decision: the password again and, where enrolled, the one-time code. */
export const signed = { password, oneTimeCode };

export const decision = z
  .object({ decision: z.enum(["approve", "refuse"]), reason: reason.optional(), ...signed })
  .refine((body) => body.decision === "approve" || body.reason !== undefined, {
    path: ["reason"],
    message: "A refusal needs a reason.",
  });

/** `?limit=&cursor=` of every list. */
export const pageQuery = z.object({
  limit: z.coerce.number().int().min(1).max(1000).default(100),
  cursor: z.string().max(200).optional(),
});

/** The same of a list whose cursor is the last id. */
export const idPageQuery = pageQuery.extend({ cursor: id.optional() });

export type PageQuery = z.output<typeof pageQuery>;

/** `items` and `next`, null at the end. */
export function pageOf<T extends z.ZodType>(item: T) {
  return z.object({ items: z.array(item), next: z.string().nullable() });
}

export const byCode = z.object({ code });
export const byId = z.object({ id });

/** A path's `{code}` of a family, lot or piece of equipment: its code in any case, or its UUID. */
export const byCodeOrId = z.object({ code: z.string().trim().min(1).max(64) });
