import { z } from "zod";
import { id } from "@/schemas/api/common";

const share = (description: string) =>
  z.coerce.number("Takes a share between 0 and 1.").gt(0).lt(1).optional().meta({ description });

export const samplePlanQuery = z.object({
  expectedSd: z.coerce.number("Takes a number.").min(0).max(1).optional().meta({
    description: "Expected standard deviation of gainTc, 1/K; that of the family's earlier lots where absent",
  }),
  coverage: share("Share of the lot to be inside; the family's where absent"),
  confidence: share("The family's where absent"),
  verificationShare: share("Share of the lot that passing verification devices have to show; 0.9 where absent"),
});

export const samplePlan = z.object({
  lot: z.string(),
  limit: z.number().meta({ description: "Pooling limit of the family, 1/K" }),
  coverage: z.number(),
  confidence: z.number(),
  expectedSd: z.number().nullable(),
  earlier: z
    .object({
      sd: z.number(),
      freedom: z.number().int(),
      lots: z.array(z.object({ lot: z.string(), derivation: id, sd: z.number(), n: z.number().int() })),
    })
    .nullable()
    .meta({ description: "Pooled standard deviation of gainTc in the samples of the family's other lots" }),
  sample: z
    .object({
      outcome: z.enum(["reachable", "spread-too-large", "beyond-bound"]),
      n: z.number().int().nullable(),
      toleranceFactor: z.number().nullable(),
      halfWidth: z.number().nullable(),
      chanceInside: z.number().nullable(),
      nLikely: z.number().int().nullable(),
      words: z.string(),
    })
    .nullable()
    .meta({ description: "Sample devices needed; null where nothing is known of the scatter" }),
  verification: z.object({
    share: z.number(),
    n: z.number().int().meta({ description: "Devices that all have to pass to show the share" }),
    shownByFive: z.number().meta({ description: "What 5 of 5 passing show at least" }),
  }),
});

export type SamplePlanView = z.output<typeof samplePlan>;
