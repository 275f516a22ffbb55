import { z } from "zod";
import { code, id, idPageQuery, pageOf, sha256Hex, signed, timestamp } from "./common";

const stationName = z.string().trim().min(1, "Give the station a name.").max(80);
const stationFamilies = z.array(code).min(1, "Name at least one family it may write.").max(100);

export const newStation = z.strictObject({ name: stationName, families: stationFamilies });

export const stationChange = z
  .strictObject({
    name: stationName.optional(),
    families: stationFamilies.optional(),
    active: z.boolean().optional().meta({ description: "False refuses all its keys at once" }),
  })
  .refine((change) => Object.values(change).some((value) => value !== undefined), "Name something to change.");

export type StationChange = z.output<typeof stationChange>;

/** Making a key is signed with the password again. */
export const stationKeyRequest = z.strictObject({ ...signed });

export const byStationKey = z.object({ id, key: id });

export const station = z.object({
  id,
  name: z.string(),
  active: z.boolean(),
  families: z.array(z.string()),
  createdAt: timestamp,
  lastSeenAt: timestamp.nullable(),
  keys: z.array(
    z.object({
      id,
      prefix: z.string(),
      createdAt: timestamp,
      lastUsedAt: timestamp.nullable(),
      revokedAt: timestamp.nullable(),
    }),
  ),
});

export const stationPage = pageOf(station);

export const newStationKey = z.object({
  id,
  key: z.string().meta({ description: "Shown this once; only its hash is stored" }),
  prefix: z.string(),
});

export const stationLive = z.object({
  items: z.array(
    z.object({
      lot: z.string(),
      family: z.string(),
      package: id.nullable(),
      version: z.string().nullable(),
      digest: sha256Hex.nullable(),
      sequence: z.number().int(),
      devices: z.number().int(),
      held: z.array(z.string()),
    }),
  ),
  validUntil: timestamp,
});

const text = (max: number) => z.string().max(max);

export const writeReport = z.object({
  id,
  counter: z.number().int().min(0).max(Number.MAX_SAFE_INTEGER),
  serial: code,
  package: text(100),
  imageSha256: sha256Hex,
  result: z.enum(["written", "failed", "interrupted"]),
  readbackSha256: sha256Hex.nullable(),
  serialBefore: text(64).nullish(),
  hardwareId: text(64).nullish(),
  firmware: text(64).nullish(),
  zeroMvV: z.number().nullish(),
  deviceTemp: z.number().nullish(),
  startedAt: timestamp,
  finishedAt: timestamp,
  operator: text(120),
  detail: text(2000).nullish(),
});

export type WriteReport = z.output<typeof writeReport>;

/** Records a station sends at once at most. */
export const WRITES_MAX = 1000;

export const writeReports = z.object({
  writes: z.array(writeReport).min(1).max(WRITES_MAX, "At most 1,000 records at once."),
});

export const writeOutcomes = [
  "verified",
  "mismatch",
  "failed",
  "interrupted",
  "unknown-image",
  "unknown-serial",
] as const;

export const writeResults = z.object({
  results: z.array(
    z.object({
      id,
      outcome: z.enum([...writeOutcomes, "duplicate", "conflict"]),
      flags: z.array(z.string()),
    }),
  ),
});

export const listedWrite = z.object({
  id,
  counter: z.number().int(),
  serial: z.string(),
  package: z.string().nullable(),
  version: z.string().nullable(),
  imageSha256: sha256Hex,
  readbackSha256: sha256Hex.nullable(),
  outcome: z.string(),
  flags: z.array(z.string()),
  station: z.string(),
  operator: z.string(),
  detail: z.string().nullable(),
  hardwareId: z.string().nullable(),
  startedAt: timestamp,
  finishedAt: timestamp,
  receivedAt: timestamp,
});

export const listedWritePage = pageOf(listedWrite);

export const writeQuery = idPageQuery.extend({
  outcome: z.enum(writeOutcomes).optional(),
  flagged: z.stringbool().optional().meta({ description: "Only records with a flag, or only those without" }),
  q: z.string().trim().min(1).max(32).optional().meta({ description: "Part of the serial" }),
});
