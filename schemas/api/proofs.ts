import { z } from "zod";
import { id, sha256Hex, timestamp } from "@/schemas/api/common";

const row = z.object({
  row: z.number().int().meta({ description: "Line of the file, the header being 1" }),
  point: z.number().int(),
  chamberC: z.number(),
  loadKg: z.number(),
  outputMvV: z.number().meta({ description: "As read" }),
  predictedMvV: z.number().meta({ description: "From the decoded image, the signal and the device's temperature" }),
  differenceIntervals: z.number(),
  limitIntervals: z.number(),
  ratio: z.number().meta({ description: "Share of the limit used; at most 1 agrees" }),
});

export const proofState = z
  .enum(["agrees", "differs", "not-judged"])
  .meta({ description: "not-judged: nothing was written by then, or what the memory held is unknown" });

export const proofDevice = z.object({
  serial: z.string(),
  state: proofState,
  reason: z.string().nullable().meta({ description: "Why it was not judged" }),
  package: id.nullable(),
  version: z.string().nullable(),
  layout: z.string().nullable(),
  firmware: z.string(),
  imageSha256: sha256Hex.nullable(),
  writtenAt: timestamp.nullable(),
  worst: row.nullable(),
  rows: z.array(row),
  shown: z
    .array(z.object({ name: z.string(), effectRatio: z.number(), shown: z.boolean() }))
    .meta({ description: "Which coefficients the readings would have missed, had the firmware left them out" }),
});

export type ProofDevice = z.output<typeof proofDevice>;

export const proofRun = z.object({
  run: id,
  lot: z.string(),
  readAt: timestamp.nullable(),
  counts: z.object({ agrees: z.number().int(), differs: z.number().int(), notJudged: z.number().int() }),
  devices: z.array(proofDevice).meta({ description: "By serial; at most 1,000" }),
});

export type ProofRunView = z.output<typeof proofRun>;

export const firstOffState = z.enum(["open", "agrees", "differs"]).meta({
  description: "open: no written device of it was proven; differs: the newest proof of one contradicts its image",
});

export const firstOff = z.object({
  layout: z.string(),
  firmware: z.string(),
  state: firstOffState,
  run: id.nullable(),
  readAt: timestamp.nullable(),
  agreed: z.number().int(),
  differed: z.number().int(),
  worstRatio: z.number().nullable(),
  shown: z.array(z.string()).meta({ description: "Coefficients that at least one device showed to be applied" }),
  notShown: z.array(z.string()),
});

export type FirstOff = z.output<typeof firstOff>;

export const lotProofs = z.object({
  live: firstOff.nullable().meta({ description: "For layout and firmware of what is live" }),
  items: z.array(firstOff).meta({ description: "A line for each layout and firmware that was proven" }),
});

export type LotProofs = z.output<typeof lotProofs>;
