import { z } from "zod";
import { id, oneTimeCode, pageOf, password, reason, sha256Hex, signed, timestamp, version } from "@/schemas/api/common";
import { signedDecision } from "@/schemas/api/families";
import { layoutStepName } from "@/schemas/api/layouts";

export const packageState = z.enum([
  "building",
  "draft",
  "failed",
  "in-review",
  "approved",
  "refused",
  "live",
  "superseded",
  "withdrawn",
]);

export const newPackage = z.strictObject({
  layout: version.meta({ description: "Version of a published layout of the lot's family" }),
  step: layoutStepName.optional().meta({ description: "Raises the version's step; never lowers it" }),
  notes: z.string().trim().max(2000).optional(),
});

export const startedPackage = z.object({ id, version, state: packageState });

const counts = z.object({
  devices: z.number().int().meta({ description: "Packed, or to be packed" }),
  lotDevices: z.number().int(),
  leftOut: z.record(z.string(), z.number().int()).meta({ description: "Devices of the lot left out, by reason" }),
});

const summaryMembers = {
  id,
  lot: z.string(),
  family: z.string(),
  version,
  state: packageState,
  digest: sha256Hex.nullable().meta({ description: "SHA-256 of manifest.json; null before the build ended well" }),
  layout: z.string().meta({ description: "Version" }),
  firmware: z.string(),
  counts,
  checks: z.object({ pass: z.number().int(), warn: z.number().int(), fail: z.number().int() }),
  sequence: z.number().int().nullable().meta({ description: "Of the newest change of what is live that names it" }),
  notes: z.string(),
  createdAt: timestamp,
  createdBy: z.string(),
  builtAt: timestamp.nullable(),
  submittedAt: timestamp.nullable(),
  approvedAt: timestamp.nullable(),
};

export const packageSummary = z.object(summaryMembers);
export const packagePage = pageOf(packageSummary);
export type PackageSummary = z.output<typeof packageSummary>;

export const packageCheck = z.object({
  code: z.string(),
  verdict: z.enum(["pass", "warn", "fail"]),
  message: z.string(),
  evidence: z.record(z.string(), z.unknown()),
});

export const packageWaiver = z.object({ check: z.string(), by: z.string(), reason: z.string(), at: timestamp });

export const packageView = z.object({
  ...summaryMembers,
  revision: z.number().int().meta({ description: "Of the family" }),
  layoutSha256: sha256Hex,
  reviewDigest: sha256Hex
    .nullable()
    .meta({ description: "What a decision names: SHA-256 over package, checks, waivers and what is live" }),
  against: z
    .object({ id, version, digest: sha256Hex })
    .nullable()
    .meta({ description: "What is live for the lot now, where that is another package" }),
  checks: z.array(packageCheck),
  waivers: z.array(packageWaiver),
  approvals: z.array(signedDecision.extend({ digest: sha256Hex.nullable() })),
  makers: z.array(z.object({ name: z.string(), act: z.string(), at: timestamp })),
  progress: z.object({ done: z.number().int(), total: z.number().int(), step: z.string() }),
  failure: z
    .object({
      code: z.string(),
      message: z.string(),
      serial: z.string().optional(),
      field: z.string().optional(),
      value: z
        .union([z.number(), z.string()])
        .optional()
        .meta({ description: "What could not be stored, in the field's unit; 64-bit integers as decimal text" }),
      limit: z
        .union([z.number(), z.string()])
        .optional()
        .meta({ description: "The limit that it breaks, in the field's unit" }),
    })
    .nullable(),
  rebuild: z
    .object({ same: z.boolean() })
    .loose()
    .nullable()
    .meta({ description: "What became of building it again; null before, and while it runs" }),
  derivations: z.array(id),
  submittedBy: z.string().nullable(),
  liveSince: timestamp.nullable(),
  mayDecide: z.boolean().meta({ description: "Whether who asks is a reviewer and no maker" }),
  isMaker: z.boolean().meta({ description: "Whether who asks had a hand in it" }),
  mayTakeBack: z.boolean(),
  reviewers: z.array(z.string()).meta({ description: "Reviewers who are no makers and so may sign" }),
});

export type PackageView = z.output<typeof packageView>;

export const waiverBody = z.object({ check: z.string().min(1).max(64), reason, ...signed });

export const packageDecision = z
  .object({
    decision: z.enum(["approve", "refuse"]),
    reviewDigest: sha256Hex.meta({ description: "As read from the package: what was looked at" }),
    reason: reason.optional(),
    ...signed,
  })
  .refine((body) => body.decision === "approve" || body.reason !== undefined, {
    path: ["reason"],
    message: "A refusal needs a reason.",
  });

/** Release and withdrawal: the reason may be left out, an empty one counts as left out. */
export const liveChange = z.object({
  reason: z
    .string()
    .trim()
    .max(2000)
    .optional()
    .transform((text) => text || undefined),
  password,
  oneTimeCode,
});

export const newReinstatement = z.object({ package: id, reason, ...signed });

export const reinstatement = z.object({
  id,
  lot: z.string(),
  package: id,
  version,
  reason: z.string(),
  state: z.enum(["asked", "done", "refused"]),
  askedBy: z.string(),
  askedAt: timestamp,
  decidedAt: timestamp.nullable(),
  approvals: z.array(signedDecision),
  mayDecide: z.boolean().meta({ description: "Whether who asks is a reviewer and did not ask for it" }),
});

export type ReinstatementView = z.output<typeof reinstatement>;
export const reinstatementPage = pageOf(reinstatement);
