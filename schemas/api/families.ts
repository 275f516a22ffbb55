import { z } from "zod";
import { code, id, pageOf, sha256Hex, timestamp } from "@/schemas/api/common";

/** Numbers of verification intervals that an accuracy class admits. Source: OIML R 60-1:2021, table 1. */
export const INTERVALS_OF_CLASS = {
  A: [50_000, 1_000_000],
  B: [5_000, 100_000],
  C: [500, 10_000],
  D: [100, 1_000],
} as const;

const temperatureC = z.number().min(-100).max(250);

/** Thresholds that a family sets for the checks of its packages; defaults: `lib/domain/package-checks/thresholds.ts`. */
export const checkThresholds = z.strictObject({
  outlierScore: z
    .number()
    .min(3, "Below 3 every lot would have some.")
    .max(1000)
    .optional()
    .meta({ description: "Robust standard deviations beyond which a value stands out" }),
  differenceShareWarn: z
    .number()
    .min(0)
    .max(1)
    .optional()
    .meta({ description: "Share of devices whose values differ from the live ones; 1 never warns" }),
  differenceStepWarn: z
    .number()
    .min(0)
    .max(1)
    .optional()
    .meta({ description: "Largest change of a value as a share of the room between its limits" }),
  signFlipsWarn: z
    .number()
    .int()
    .min(0)
    .max(60_000)
    .optional()
    .meta({ description: "Devices whose gain or temperature coefficient may change its sign" }),
});

/** A family's values: the body of `POST /families`, and the document that a revision freezes and hashes. */
export const familyDocument = z
  .strictObject({
    code,
    name: z.string().trim().min(1, "Give the family a name.").max(120),
    capacityKg: z.number().positive().max(10_000_000).meta({ description: "Rated capacity Emax, kg" }),
    nominalMvV: z.number().min(0.01).max(100).meta({ description: "Output at capacity, mV/V" }),
    referenceC: temperatureC.meta({ description: "Reference temperature, °C" }),
    accuracyClass: z.enum(["A", "B", "C", "D"]).meta({ description: "Accuracy class of OIML R 60" }),
    intervals: z.number().int().positive().meta({ description: "Number of verification intervals n" }),
    vMinRatioY: z.number().positive().max(1_000_000).meta({ description: "Y = (Emax − Emin) / v_min" }),
    pLc: z
      .number()
      .min(0.3, "R 60 takes 0.3 to 0.8.")
      .max(0.8, "R 60 takes 0.3 to 0.8.")
      .meta({ description: "Fraction of the instrument's error given to the cell; OIML R 60-1:2021, 5.3.2" }),
    temperatureMinC: temperatureC.meta({ description: "Lowest working temperature, °C" }),
    temperatureMaxC: temperatureC.meta({ description: "Highest working temperature, °C" }),
    minSoakMinutes: z.number().min(0).max(10_080).meta({ description: "Least soak at a temperature, min" }),
    minLoadFraction: z
      .number()
      .min(0)
      .max(1)
      .meta({ description: "Least load of a loaded reading as a fraction of capacity" }),
    minTemperatureSpanK: z.number().min(0).max(350).meta({ description: "Least span of a run's temperatures, K" }),
    temperatureShare: z
      .number()
      .positive()
      .max(1)
      .meta({ description: "Share of the error envelope that the spread of gainTc may use" }),
    coverage: z
      .number()
      .min(0.5)
      .max(0.9999)
      .meta({ description: "Share of the lot that the tolerance interval has to cover" }),
    confidence: z.number().min(0.5).max(0.9999).meta({ description: "Confidence of the intervals" }),
    checks: checkThresholds.optional().meta({
      description:
        "From when on checks of packages warn; what is left out has its default, and stays out of the document",
    }),
  })
  .superRefine((family, context) => {
    const { temperatureMinC, temperatureMaxC, accuracyClass, intervals } = family;
    if (temperatureMinC >= temperatureMaxC) {
      context.addIssue({
        code: "custom",
        path: ["temperatureMaxC"],
        message: `Takes more than the lowest temperature, ${temperatureMinC} °C.`,
      });
    }
    const [least, most] = INTERVALS_OF_CLASS[accuracyClass];
    if (intervals < least || intervals > most) {
      context.addIssue({
        code: "custom",
        path: ["intervals"],
        message: `Class ${accuracyClass} takes ${least} to ${most} intervals (OIML R 60-1, table 1).`,
      });
    }
  });

export type FamilyDocument = z.output<typeof familyDocument>;

/** States of family revisions and layouts. */
export const publishState = z.enum(["draft", "in-review", "published", "retired"]);
export type PublishState = z.output<typeof publishState>;

/** Who did something to an object, by name, for people. */
export const signedDecision = z.object({
  decision: z.enum(["approve", "refuse", "revoke"]),
  name: z.string(),
  meaning: z.string(),
  reason: z.string().nullable(),
  at: timestamp,
});

const revisionMembers = {
  id,
  number: z.number().int(),
  state: publishState,
  sha256: sha256Hex,
  document: z.record(z.string(), z.unknown()),
  createdAt: timestamp,
  createdBy: z.string(),
  submittedAt: timestamp.nullable(),
  submittedBy: z.string().nullable(),
  publishedAt: timestamp.nullable(),
  retiredAt: timestamp.nullable(),
};

export const familyRevision = z.object(revisionMembers).meta({ description: "One frozen set of a family's values" });

export const familyRevisionReply = z.object({
  ...revisionMembers,
  code,
  revision: z.number().int(),
  makers: z.array(z.string()),
  decisions: z.array(signedDecision),
});

export const familySummary = z.object({
  id,
  code,
  name: z.string(),
  capacityKg: z.number(),
  nominalMvV: z.number(),
  accuracyClass: z.string(),
  intervals: z.number().int(),
  revision: z.number().int().nullable().meta({ description: "Newest published revision; null where there is none" }),
  newestRevision: z.number().int(),
  state: publishState.meta({ description: "State of the newest revision" }),
  layouts: z.number().int().meta({ description: "Published layouts" }),
  lots: z.number().int(),
  createdAt: timestamp,
});

export const familyList = pageOf(familySummary);

export const familyReply = z.object({
  ...familySummary.shape,
  revisions: z.array(familyRevisionReply),
});

export const revisionPath = z.object({
  code: z.string().min(1).max(64),
  n: z.coerce.number().int().min(1).max(1_000_000),
});
