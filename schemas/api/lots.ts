import semver from "semver";
import { z } from "zod";
import { code, id, pageOf, pageQuery, reason, timestamp } from "@/schemas/api/common";

/** Devices a lot takes at most. */
export const LOT_DEVICES_MAX = 60_000;

const firmware = z
  .string()
  .trim()
  .max(64)
  .refine((text) => semver.valid(text) === text, "Takes a version such as 2.3.0.")
  .meta({ description: "Version of the firmware in the lot's devices", example: "2.3.0" });

export const newLot = z.strictObject({ code, family: code, firmware });
export type NewLot = z.output<typeof newLot>;

export const lotState = z
  .enum(["planned", "reading", "derived", "building", "in-review", "approved", "live"])
  .meta({ description: "How far the lot has come, by the furthest thing in it" });

export const lotQuery = pageQuery.extend({
  family: code.optional(),
  q: z.string().trim().min(1).max(32).optional().meta({ description: "Part of the lot's code" }),
  state: lotState.optional(),
});

export const lot = z.object({
  id,
  code,
  family: z.string(),
  revision: z.number().int(),
  firmware: z.string(),
  sequence: z.number().int().meta({ description: "Place of the newest change of what is live; 0 before the first" }),
  state: lotState,
  devices: z.number().int(),
  createdAt: timestamp,
  createdBy: z.string(),
});

export const lotList = pageOf(lot);

const batch = code.nullish().meta({ description: "Batch code, in the form of serials; null where nobody knows" });

/** A device with what it is made of. */
export const newDevice = z.strictObject({ serial: code, gaugeBatch: batch, materialBatch: batch });

export const newDevices = z
  .strictObject({
    serials: z.array(code).max(LOT_DEVICES_MAX).optional(),
    devices: z
      .array(newDevice)
      .max(LOT_DEVICES_MAX)
      .optional()
      .meta({ description: "Serials with the batches of their gauges and material; known serials get them too" }),
    reason: reason
      .optional()
      .meta({ description: "Why batches that were told before are corrected; without it another batch is refused" }),
  })
  .refine(({ serials = [], devices = [] }) => serials.length + devices.length > 0, {
    path: ["serials"],
    message: "Name at least one serial.",
  });

export const addedDevices = z.object({
  added: z.number().int().meta({ description: "Serials new in the lot" }),
  known: z.number().int().meta({ description: "Serials that were in the lot before" }),
  batchesSet: z
    .number()
    .int()
    .optional()
    .meta({ description: "Known serials that got batches now, corrected ones included; where batches were given" }),
});

export const deviceQuery = pageQuery.extend({
  q: z.string().trim().min(1).max(32).optional().meta({ description: "Part of the serial" }),
});

export const lotDevice = z.object({
  serial: z.string(),
  state: z.enum(["active", "held", "scrapped", "shipped"]),
  coefficients: z
    .enum(["proposed", "approved", "refused", "stale", "revoked"])
    .nullable()
    .meta({ description: "State of the newest coefficient set" }),
  hardwareId: z.string().nullable(),
  gaugeBatch: z.string().nullable(),
  materialBatch: z.string().nullable(),
  addedAt: timestamp,
});

export const lotDeviceList = pageOf(lotDevice);
