import { z } from "zod";
import { id, pageOf, timestamp } from "@/schemas/api/common";
import { LOT_DEVICES_MAX } from "@/schemas/api/lots";

/** Why a device can't be drawn. */
export const LEFT_OUT_REASONS = ["held", "scrapped", "shipped", "measured", "planned"] as const;
export type LeftOutReason = (typeof LEFT_OUT_REASONS)[number];

export const newSampleDraw = z.strictObject({
  count: z.number().int().min(1, "Draw at least one device.").max(LOT_DEVICES_MAX),
  seed: z
    .string()
    .trim()
    .toLowerCase()
    .regex(/^[0-9a-f]{32}$/, "Takes 32 hexadecimal digits.")
    .optional()
    .meta({ description: "128 bits; drawn by the server where absent, and recorded either way" }),
});

const batch = z.string().nullable();

export const sampleDraw = z
  .object({
    id,
    lot: z.string(),
    seed: z.string(),
    count: z.number().int(),
    eligible: z.number().int().meta({ description: "Devices that could be drawn" }),
    serials: z.array(z.string()).meta({ description: "Drawn, rising" }),
    strata: z
      .array(z.object({ gaugeBatch: batch, materialBatch: batch, devices: z.number().int(), drawn: z.number().int() }))
      .meta({ description: "Devices that share both batches, with how many of them were drawn" }),
    leftOut: z
      .array(z.object({ reason: z.enum(LEFT_OUT_REASONS), count: z.number().int(), serials: z.array(z.string()) }))
      .meta({ description: "What could not be drawn and why, with the first 100 serials" }),
    method: z.string(),
    createdAt: timestamp,
    createdBy: z.string(),
  })
  .meta({ description: "A sample drawn at random; the same devices, count and seed draw the same serials again" });

export type SampleDrawView = z.output<typeof sampleDraw>;

export const sampleDrawPage = pageOf(sampleDraw);
