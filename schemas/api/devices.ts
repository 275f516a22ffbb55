import { z } from "zod";
import { code, id, oneTimeCode, pageOf, pageQuery, reason, sha256Hex, timestamp } from "./common";

export const deviceEventKinds = [
  "hold",
  "resume",
  "scrap",
  "rework",
  "board-replaced",
  "firmware",
  "shipped",
  "returned",
] as const;

/** What happened to a device; hold and resume are signed with the password. */
export const newDeviceEvent = z
  .object({
    kind: z.enum(deviceEventKinds),
    reason,
    reference: z.string().trim().max(120).optional(),
    hardwareId: z.string().trim().min(1).max(64).optional(),
    firmware: z.string().trim().min(1).max(64).optional(),
    password: z.string().max(1000).optional(),
    oneTimeCode,
  })
  .refine((event) => !["hold", "resume"].includes(event.kind) || event.password, {
    path: ["password"],
    message: "Holding and going on are signed: enter your password again.",
  })
  .refine((event) => event.kind !== "board-replaced" || event.hardwareId, {
    path: ["hardwareId"],
    message: "Name the hardware id of the new board.",
  })
  .refine((event) => event.kind !== "firmware" || event.firmware, {
    path: ["firmware"],
    message: "Name the firmware version.",
  });

export type NewDeviceEventBody = z.output<typeof newDeviceEvent>;

export const bySerial = z.object({ serial: code });

export const deviceEvent = z.object({ id, serial: z.string(), kind: z.string(), at: timestamp });

const coefficients = z.record(z.string(), z.number().nullable());

export const deviceState = z.enum([
  "never-written",
  "carries-live",
  "carries-live-values",
  "carries-other-values",
  "carries-unreleased",
  "unknown",
  "held",
  "scrapped",
]);

export const historyEntry = z.object({
  at: timestamp,
  kind: z.enum(["written", "event", "run", "coefficients", "approved", "live"]),
  what: z.string(),
  tone: z.enum(["good", "wait", "bad", "info", "idle"]),
  who: z.string().nullable(),
  detail: z.string().nullable(),
  link: z.string().nullable(),
});

export type HistoryEntry = z.output<typeof historyEntry>;

export const deviceTrace = z.object({
  serial: z.string(),
  lot: z.string(),
  family: z.string(),
  state: deviceState,
  held: z.boolean(),
  scrapped: z.boolean(),
  shipped: z.boolean(),
  hardwareId: z.string().nullable(),
  firmware: z.string().nullable(),
  current: z
    .object({
      package: id.nullable(),
      version: z.string().nullable(),
      imageSha256: sha256Hex.nullable(),
      writtenAt: timestamp,
      station: z.string(),
      outcome: z.string(),
      known: z.boolean(),
      live: z.boolean(),
      sameValuesAsLive: z.boolean().nullable(),
    })
    .nullable(),
  coefficients: z.object({ derivation: id, state: z.string(), role: z.string(), values: coefficients }).nullable(),
  history: z.array(historyEntry),
});

export type DeviceTrace = z.output<typeof deviceTrace>;

export const rewrite = z.object({
  serial: z.string(),
  why: z.enum(["never-written", "unknown", "other-values"]),
  carries: z.string().nullable(),
  held: z.boolean(),
  shipped: z.boolean(),
  lastOutcome: z.string().nullable(),
  writtenAt: timestamp.nullable(),
  station: z.string().nullable(),
});

export const dumpResult = z.object({
  match: z.enum(["exact", "differs", "other-serial", "unknown"]),
  serial: z.string().nullable(),
  package: id.nullable(),
  version: z.string().nullable(),
  live: z.boolean(),
  checksums: z.array(z.object({ name: z.string(), ok: z.boolean() })),
  differences: z.array(
    z.object({
      at: z.number().int(),
      field: z.string().nullable(),
      expected: z.string(),
      actual: z.string(),
      expectedValue: z.union([z.number(), z.string()]).nullable(),
      actualValue: z.union([z.number(), z.string()]).nullable(),
      unit: z.string().nullable().meta({ description: "Of both values, as the layout stores them" }),
    }),
  ),
  advice: z.string(),
});

export const rewritePage = pageOf(rewrite);

/** Bytes of an uploaded dump at most: a memory of 64 KiB as Intel HEX, even with one byte a record. */
export const DUMP_MAX_BYTES = 1024 * 1024;

export const HEX_TYPES = ["text/x-intel-hex", "text/x-motorola-srecord", "text/plain"] as const;
export const RAW_TYPE = "application/octet-stream";

export type DumpResult = z.output<typeof dumpResult>;

export const impactQuery = pageQuery.extend({
  run: z.uuid().optional(),
  derivation: z.uuid().optional(),
  layout: z.uuid().optional(),
  package: z.uuid().optional(),
  equipment: code.optional(),
  from: timestamp.optional().meta({ description: "With equipment: readings taken at or after" }),
  to: timestamp.optional().meta({ description: "With equipment: readings taken at or before" }),
});

export const impactItem = z.object({
  serial: z.string(),
  lot: z.string(),
  coefficients: z.string().nullable().meta({ description: "State of the set that was reached" }),
  role: z.string().nullable(),
  packages: z.array(z.string()),
  carries: z.string().nullable().meta({ description: "Version by the deciding write record" }),
  outcome: z.string().nullable(),
  carriesReached: z.boolean().meta({ description: "The device carries an image that was reached" }),
  held: z.boolean(),
  shipped: z.boolean(),
});

export const impactPage = pageOf(impactItem);
