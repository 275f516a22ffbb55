import { z } from "zod";
import { id, pageOf, sha256Hex, timestamp, version } from "@/schemas/api/common";
import { publishState, signedDecision } from "@/schemas/api/families";

export const LAYOUT_MAX_BYTES = 1024 * 1024;

const problem = z.object({
  path: z.string().meta({ description: "JSON pointer into the document" }),
  code: z.string(),
  message: z.string(),
});

export const layoutStepName = z.enum(["major", "minor", "patch"]);

export const lintReply = z.object({
  errors: z.array(problem),
  warnings: z.array(problem),
  step: layoutStepName
    .nullable()
    .meta({ description: "Smallest step against the newest published lower version; null where there is none" }),
});

export const layoutSummary = z.object({
  id,
  family: z.string(),
  version: z.string(),
  state: publishState,
  firmware: z.string(),
  order: z.number().int(),
  bytes: z.number().int().meta({ description: "Size of the memory" }),
  sha256: sha256Hex,
  step: layoutStepName.nullable(),
  createdAt: timestamp,
  createdBy: z.string(),
  updatedAt: timestamp,
  updatedBy: z.string(),
  submittedAt: timestamp.nullable(),
  submittedBy: z.string().nullable(),
  publishedAt: timestamp.nullable(),
  retiredAt: timestamp.nullable(),
});

export const layoutList = pageOf(layoutSummary);

export const layoutReply = z.object({
  ...layoutSummary.shape,
  draft: z
    .number()
    .int()
    .meta({ description: "Number of the saved draft, for `?draft=` or If-Match of the next save" }),
  unfinished: z.boolean().meta({
    description: "The source has errors still; the document is the last one without. Drafts only.",
  }),
  document: z.record(z.string(), z.unknown()),
  source: z.string().meta({ description: "The document as its author wrote it" }),
  makers: z.array(z.string()),
  decisions: z.array(signedDecision),
});

export const layoutPath = z.object({ code: z.string().trim().min(1).max(64), version });

export const saveQuery = z.object({
  draft: z.coerce
    .number()
    .int()
    .min(1)
    .optional()
    .meta({ description: "Number of the draft that was edited; another one now saved is a 409" }),
});

export const retireBody = z.object({ reason: z.string().trim().max(2000).optional() });

export const keptText = z.object({
  draft: z.number().int().meta({ description: "Number of the draft that now stands" }),
  unfinished: z.boolean().meta({ description: "The text has errors, so the draft's document did not follow it" }),
  sha256: sha256Hex.meta({ description: "Digest of the draft's document" }),
  updatedAt: timestamp,
  now: timestamp.meta({ description: "The server's clock, to tell how long ago that was" }),
});

export const textQuery = z.object({
  draft: z.coerce
    .number()
    .int()
    .min(1)
    .optional()
    .meta({ description: "Number of the draft whose text is known; it is not sent again" }),
});

export const storedText = z.object({
  state: publishState,
  draft: z.number().int(),
  unfinished: z.boolean(),
  updatedAt: timestamp,
  updatedBy: z.string(),
  submittedAt: timestamp.nullable(),
  submittedBy: z.string().nullable(),
  source: z.string().nullable().meta({ description: "The text; null where the draft that was named still stands" }),
});

export const layoutUse = z.object({
  lot: z.string(),
  firmware: z.string().meta({ description: "Firmware in the lot's devices" }),
  packages: z.number().int().meta({ description: "Packages built from the layout, failed ones not counted" }),
  underWay: z.number().int().meta({ description: "Of them building, draft, in review or approved" }),
  live: z
    .object({ id, version: z.string() })
    .nullable()
    .meta({ description: "The lot's live package, if it is one of them" }),
});

export const layoutUses = pageOf(layoutUse);
