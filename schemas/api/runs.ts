import { z } from "zod";
import { code, id, pageOf, reason, sha256Hex, timestamp } from "@/schemas/api/common";
import { chamberPosition } from "@/schemas/api/equipment";

export const purpose = z
  .enum(["sample", "zero", "span", "verification", "proof"])
  .meta({ description: "What the run is for (section 2)" });

export const severity = z
  .enum(["hard", "soft", "note"])
  .meta({ description: "hard blocks approval, soft needs an acknowledgement with a reason" });

/** A finding on a run or a derivation, with the id it is acknowledged by. */
export const finding = z.object({
  id,
  code: z.string(),
  severity,
  serial: z.string().nullable(),
  point: z.number().int().nullable(),
  message: z.string(),
  data: z.record(z.string(), z.unknown()).optional(),
});

export type FindingView = z.output<typeof finding>;

/** `?equipment=A,B`: codes, separated by commas. */
const codes = z
  .string()
  .transform((text) => text.split(",").filter((part) => part.trim() !== ""))
  .pipe(z.array(code).max(50))
  .meta({ description: "Equipment codes, separated by commas", example: "TS-01,CH-02" });

export const newRunQuery = z
  .object({
    purpose,
    equipment: codes.optional(),
    addDevices: z.enum(["true", "false"]).default("false").meta({ description: "Add serials that no lot has yet" }),
    supersedes: id.optional().meta({ description: "Run of the same purpose that this one replaces" }),
    reason: reason.optional().meta({ description: "Why the earlier run is replaced" }),
    plan: id.optional().meta({ description: "Planned run that these are the readings of" }),
    fileName: z.string().trim().max(255).optional(),
    sourceSha256: sha256Hex
      .optional()
      .meta({ description: "Of the file that these bytes were made from by column mapping" }),
  })
  .refine((query) => query.supersedes === undefined || query.reason !== undefined, {
    path: ["reason"],
    message: "Say why the earlier run is replaced.",
  });

const runMembers = {
  id,
  lot: z.string(),
  purpose,
  sha256: sha256Hex,
  sourceSha256: sha256Hex
    .nullable()
    .meta({ description: "Of the file that the bytes were made from, null where they are it" }),
  bytes: z.number().int(),
  rows: z.number().int(),
  devices: z.number().int(),
  fileName: z.string().nullable(),
  temperatureLowC: z.number().nullable(),
  temperatureHighC: z.number().nullable(),
  supersedes: id.nullable(),
  supersededBy: id.nullable(),
  reason: z.string().nullable(),
  plan: z.object({ id, name: z.string() }).nullable().meta({ description: "Planned run that it is the reading of" }),
  createdAt: timestamp,
  createdBy: z.string(),
  equipment: z.array(
    z.object({
      code: z.string(),
      kind: z.string(),
      certificate: z.string(),
      calibratedUntil: z.iso.date(),
      uncertainty: z.number(),
      coverageFactor: z.number(),
      positions: z.array(chamberPosition),
    }),
  ),
  findings: z.array(finding),
};

export const run = z.object(runMembers).meta({ description: "A thermal run as uploaded" });
export type RunView = z.output<typeof run>;

export const newRunReply = z.object({
  ...runMembers,
  added: z.number().int().meta({ description: "Serials added to the lot" }),
  staleSets: z
    .number()
    .int()
    .meta({ description: "Coefficient sets made stale because they rest on the superseded run" }),
});

export const runPage = pageOf(run);

export const reading = z.object({
  row: z.number().int().meta({ description: "Line of the file, the header being 1" }),
  serial: z.string(),
  point: z.number().int(),
  chamberC: z.number(),
  soakMin: z.number(),
  deviceTemp: z.number(),
  loadKg: z.number(),
  signalMvV: z.number(),
  takenAt: timestamp,
  position: z.string().nullable(),
  hardwareId: z.string().nullable(),
  dwellS: z.number().nullable(),
  outputMvV: z.number().nullable(),
});

export const readingPage = pageOf(reading);
