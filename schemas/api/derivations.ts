import { z } from "zod";
import { code, id, pageOf, reason, sha256Hex, signed, timestamp } from "@/schemas/api/common";
import { envelopeSurvey, uncertaintyBudget } from "@/schemas/api/derivation-statements";
import { signedDecision } from "@/schemas/api/families";
import { finding, purpose } from "@/schemas/api/runs";

export const method = z.enum(["individual", "pooled-gain"]);
export const order = z.union([z.literal(1), z.literal(2)]);

export const newDerivation = z.strictObject({
  method,
  order,
  runs: z.array(id).min(1, "Choose at least one run.").max(50),
  exclude: z
    .array(z.strictObject({ serial: code, reason }))
    .max(1000)
    .default([])
    .refine((list) => new Set(list.map((one) => one.serial)).size === list.length, "A serial is named twice."),
});

export type NewDerivationBody = z.output<typeof newDerivation>;

export const previewQuery = z.object({
  preview: z
    .enum(["true", "false"])
    .default("false")
    .meta({ description: "Compute at once, answer with the result and store nothing" }),
});

export const derivationState = z.enum(["working", "proposed", "approved", "partly-approved", "refused", "failed"]);

const interval = z.tuple([z.number(), z.number()]).nullable();

export const pooled = z.object({
  gainTc: z.number().meta({ description: "1/K" }),
  gainTc2: z.number().optional().meta({ description: "1/K²" }),
  sd: z.number().nullable(),
  n: z.number().int(),
  meanGain: z.number(),
  sdGain: z.number().nullable(),
  confidenceInterval: interval,
  toleranceInterval: interval,
  toleranceFactor: z.number().nullable(),
  coverage: z.number(),
  confidence: z.number(),
  limit: z.number(),
  verdict: z.enum(["inside", "outside", "not-judged"]),
  shareExpected: z
    .number()
    .nullable()
    .optional()
    .meta({ description: "At least this share of the lot is within the limit of the mean, at the confidence (exact)" }),
  shareEstimate: z
    .number()
    .nullable()
    .optional()
    .meta({ description: "Share within the limit, were mean and sd the lot's own" }),
  sampleNeeded: z.number().int().nullable().optional().meta({
    description: "Sample devices in total with which this sd would come out inside; null where no number does",
  }),
});

export const verificationResult = z.object({
  serial: z.string(),
  spanErrorPpm: z.number().nullable(),
  spanRatio: z.number().nullable(),
  zeroShiftRatio: z.number().nullable(),
  passed: z.boolean().nullable(),
  judged: z.array(z.string()),
});

const numberOrNull = z.number().nullable();

const counts = z.object({
  devices: z.number().int(),
  withValues: z.number().int(),
  roles: z.record(z.string(), z.number().int()),
  states: z.record(z.string(), z.number().int()),
  findings: z.object({ hard: z.number().int(), soft: z.number().int(), note: z.number().int() }),
});

const resultMembers = {
  lot: z.string(),
  family: z.string(),
  revision: z.number().int(),
  sha256: sha256Hex,
  engine: z.string(),
  method: z.enum(["individual", "pooled-gain", "import"]),
  order: z.number().int(),
  provenRange: interval.meta({ description: "°C; null where nothing is proven" }),
  pooled: pooled.optional(),
  counts,
  findings: z
    .array(finding)
    .meta({ description: "At most 1,000, those of the lot first; all of them by /derivations/{id}/findings" }),
  verification: z.array(verificationResult),
  envelope: envelopeSurvey.nullable(),
  uncertainty: uncertaintyBudget.nullable(),
};

export const derivation = z.object({
  id,
  state: derivationState,
  ...resultMembers,
  runs: z.array(z.object({ id, purpose, sha256: sha256Hex, supersededBy: id.nullable() })),
  exclude: z.array(z.object({ serial: z.string(), reason: z.string(), by: z.string() })),
  progress: z.object({ done: z.number().int(), total: z.number().int(), step: z.string() }),
  failure: z.object({ code: z.string(), message: z.string() }).nullable(),
  makers: z.array(z.object({ name: z.string(), act: z.string(), at: timestamp })),
  mayDecide: z.boolean().meta({ description: "Whether who asks is a reviewer and no maker" }),
  approvals: z.array(signedDecision),
  acknowledgements: z.array(z.object({ finding: id, reason: z.string(), by: z.string(), at: timestamp })),
  createdAt: timestamp,
  createdBy: z.string(),
  finishedAt: timestamp.nullable(),
});

export type DerivationView = z.output<typeof derivation>;

export const derivationSummary = z.object({
  id,
  state: derivationState,
  method: z.enum(["individual", "pooled-gain", "import"]),
  order: z.number().int(),
  sha256: sha256Hex,
  provenRange: interval,
  devices: z.number().int(),
  withValues: z.number().int(),
  findings: z.object({ hard: z.number().int(), soft: z.number().int(), note: z.number().int() }),
  createdAt: timestamp,
  createdBy: z.string(),
  finishedAt: timestamp.nullable(),
});

export type DerivationSummary = z.output<typeof derivationSummary>;
export const derivationPage = pageOf(derivationSummary);
export const startedDerivation = z.object({ id, state: derivationState });

export const coefficients = z.object({
  tempOffset: z.number(),
  tempSlope: z.number(),
  zero: z.number(),
  zeroTc: z.number(),
  zeroTc2: z.number().optional(),
  gain: z.number(),
  gainTc: z.number(),
  gainTc2: z.number().optional(),
});

const deviceMembers = {
  serial: z.string(),
  role: z.enum(["sample", "zero", "verification", "excluded", "imported"]),
  state: z.enum(["proposed", "approved", "refused", "stale", "revoked"]).nullable(),
  coefficients: coefficients.nullable(),
  individual: z.object({ gain: z.number(), gainTc: z.number(), gainTc2: z.number().optional() }).nullable(),
  residuals: z
    .object({ temperature: z.array(z.number()), zero: z.array(z.number()), gain: z.array(z.number()).nullable() })
    .nullable(),
  uncertainty: z
    .object({
      zero: numberOrNull,
      zeroTc: numberOrNull,
      gain: numberOrNull,
      gainTc: numberOrNull,
      zeroTc2: numberOrNull.optional(),
      gainTc2: numberOrNull.optional(),
      residualSdTemperature: numberOrNull,
      residualSdZero: numberOrNull,
      residualSdGain: numberOrNull,
      degreesOfFreedomTemperature: z.number(),
      degreesOfFreedomZero: z.number(),
      degreesOfFreedomGain: z.number(),
    })
    .nullable(),
  gainFrom: z.enum(["own-points", "span-run", "sample-mean"]).nullable(),
  spanErrorPpm: numberOrNull,
  spanRatio: numberOrNull,
  zeroShiftRatio: numberOrNull,
  measuredRangeC: z.tuple([z.number(), z.number()]).nullable(),
  findings: z.array(finding),
};

export const derivedDevice = z.object(deviceMembers);
export type DerivedDevice = z.output<typeof derivedDevice>;
export const derivedDevicePage = pageOf(derivedDevice);

export const derivationPreview = z.object({
  preview: z.literal(true),
  ...resultMembers,
  devices: z.array(derivedDevice).meta({ description: "At most 1,000, by serial" }),
});

export type DerivationPreview = z.output<typeof derivationPreview>;

const curve = z.object({
  before: z.array(z.object({ chamberC: z.number(), value: z.number() })),
  after: z.array(z.object({ chamberC: z.number(), value: z.number() })),
});

export const derivedDeviceDetail = z.object({
  ...deviceMembers,
  points: z.array(
    z.object({
      purpose,
      point: z.number().int(),
      chamberC: z.number(),
      deviceTemp: z.number(),
      zeroMvV: z.number(),
      spanMvV: numberOrNull,
    }),
  ),
  covariance: z
    .object({ zero: z.array(z.array(z.number())).nullable(), gain: z.array(z.array(z.number())).nullable() })
    .meta({
      description: "Of zero, zeroTc (, zeroTc2) and of gain, gainTc (, gainTc2); null without a degree of freedom",
    }),
  curves: z
    .object({ zeroIntervals: curve, spanPpm: curve })
    .nullable()
    .meta({ description: "Drift over chamber temperature before and after compensation" }),
});

export type DerivedDeviceDetail = z.output<typeof derivedDeviceDetail>;

export const findingPage = pageOf(finding);

export const derivationDecision = z
  .object({
    decision: z.enum(["approve", "refuse", "revoke"]),
    serials: z.array(code).min(1).max(60_000).optional().meta({ description: "Only these devices; all without it" }),
    reason: reason.optional(),
    acknowledge: z
      .array(z.object({ finding: z.string().min(1).max(64), reason }))
      .max(10_000)
      .default([])
      .meta({ description: "Soft findings accepted, each by its id, or by its code for all of that code" }),
    ...signed,
  })
  .refine((body) => body.decision === "approve" || body.reason !== undefined, {
    path: ["reason"],
    message: "Say why.",
  });

export type DerivationDecisionBody = z.output<typeof derivationDecision>;
