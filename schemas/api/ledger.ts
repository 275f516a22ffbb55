import { z } from "zod";
import { id, pageOf, pageQuery, sha256Hex, timestamp } from "./common";

/** One event as it is hashed, and its hash: SHA-256 of the RFC 8785 form of the other members. */
export const ledgerEvent = z.object({
  seq: z.number().int(),
  at: timestamp,
  actor: z.string().meta({ description: "Id of a person or station, or system" }),
  action: z.string(),
  subject: z.string(),
  data: z.record(z.string(), z.unknown()),
  previous: sha256Hex,
  hash: sha256Hex,
});

export type LedgerEvent = z.output<typeof ledgerEvent>;

export const ledgerPage = pageOf(ledgerEvent);

export const ledgerQuery = pageQuery.extend({
  cursor: z.coerce.number().int().positive().max(Number.MAX_SAFE_INTEGER).optional(),
  subject: z.string().trim().min(1).max(200).optional().meta({ description: "Code or id of what it happened to" }),
  action: z
    .string()
    .trim()
    .regex(/^[a-z][a-z.-]{0,60}$/, "Takes an action such as package.approved, or its beginning such as package.")
    .optional()
    .meta({ description: "An action, or the beginning of one" }),
  actor: z.union([id, z.literal("system")]).optional(),
  from: timestamp.optional(),
  to: timestamp.optional(),
  order: z.enum(["desc", "asc"]).default("desc").meta({ description: "Newest or oldest first" }),
});

export type LedgerQuery = z.output<typeof ledgerQuery>;

/** The same for people: who by name, and the texts that were not erased. */
export const ledgerEntry = ledgerEvent.extend({
  actorName: z.string().nullable(),
  texts: z.array(
    z.object({ name: z.string(), content: z.string().nullable().meta({ description: "Null once erased" }) }),
  ),
});

export type LedgerEntry = z.output<typeof ledgerEntry>;

export const ledgerEntryPage = pageOf(ledgerEntry);

export const ledgerHead = z.object({
  seq: z.number().int().meta({ description: "0 while nothing has happened" }),
  at: timestamp.nullable(),
  hash: sha256Hex,
});

export const ledgerVerdict = z.union([
  z.object({ ok: z.literal(true), events: z.number().int(), head: sha256Hex }),
  z.object({
    ok: z.literal(false),
    brokenAt: z.number().int().meta({ description: "Place of the first event that does not hold" }),
    reason: z.enum(["gap", "previous", "hash", "content", "text", "cut-off"]),
    message: z.string(),
  }),
]);

export type LedgerVerdict = z.output<typeof ledgerVerdict>;
