import { z } from "zod";

/** A refusal as RFC 9457 problem details; the facts of it stand beside these members. */
export const problem = z
  .looseObject({
    type: z.literal("about:blank"),
    title: z.string(),
    status: z.int(),
    code: z.string().meta({ description: "Stable: noun.reason", example: "lot.not_found" }),
    detail: z.string().meta({ description: "A sentence that says how to mend it" }),
    instance: z.string().meta({ description: "The request's id, as in the log" }),
    errors: z
      .array(
        z.looseObject({
          path: z.string().optional().meta({ description: "JSON pointer" }),
          code: z.string(),
          message: z.string(),
        }),
      )
      .optional()
      .meta({ description: "Everything that is wrong, at once" }),
  })
  .meta({ description: "Problem details (RFC 9457); the facts of the refusal stand beside these members" });
