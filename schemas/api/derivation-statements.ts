import { z } from "zod";

const numberOrNull = z.number().nullable();

const effects = z.object({
  gainTc: numberOrNull.meta({ description: "1/K" }),
  zeroTc: numberOrNull.meta({ description: "mV/V/K" }),
  intervals: numberOrNull.meta({ description: "Error of the corrected output at capacity, in v" }),
});

export const uncertaintyBudget = z
  .object({
    formula: z.string().meta({ description: "How the lines are combined, in words and signs" }),
    level: z.number().meta({ description: "Coverage probability of the expanded uncertainties" }),
    atC: numberOrNull.meta({ description: "End of the proven range that the lines' intervals stand for, °C" }),
    lines: z.array(
      z.object({
        source: z.string(),
        words: z.string(),
        distribution: z.enum(["normal", "rectangular"]),
        value: numberOrNull.meta({ description: "As observed or certified; null where nothing is known" }),
        unit: z.string(),
        divisor: numberOrNull,
        standard: numberOrNull.meta({ description: "Standard uncertainty, in the unit" }),
        df: numberOrNull.meta({ description: "Degrees of freedom; null counts as infinitely many" }),
        ...effects.shape,
        within: z
          .string()
          .nullable()
          .meta({ description: "Source whose gainTc contains this one's already, so that it isn't added again" }),
      }),
    ),
    combined: effects.meta({ description: "Standard uncertainties" }),
    degreesOfFreedom: effects.meta({ description: "Effective (Welch and Satterthwaite); null: infinitely many" }),
    coverageFactor: effects,
    expanded: effects,
    ends: z
      .array(
        z.object({ temperatureC: z.number(), combined: z.number(), coverageFactor: z.number(), expanded: z.number() }),
      )
      .meta({ description: "Error at capacity, in v, at both ends of the proven range" }),
    missing: z.array(z.string()).meta({ description: "Sources on which nothing is known, left out of the sums" }),
    chamber: z.object({
      individual: z.number().meta({ description: "What a chamber error leaves of an individual trim, v: nothing" }),
      pooled: numberOrNull.meta({ description: "What the chamber's uniformity leaves of a pooled gain, v" }),
      perKelvin: numberOrNull.meta({ description: "v of a pooled gain for each kelvin of error between the ends" }),
      words: z.string(),
    }),
  })
  .meta({ description: "Uncertainty of the coefficients and of the output, by source" });

const spanExtreme = z
  .object({
    serial: z.string(),
    chamberC: z.number(),
    errorPpm: z.number(),
    ratio: z.number().meta({ description: "Share of the envelope; at most 1 is inside" }),
    stepEnds: z
      .array(z.object({ load: z.number(), error: z.number(), limit: z.number(), ratio: z.number() }))
      .meta({ description: "In v, at the loads where the envelope is tightest" }),
    proven: z.boolean().meta({ description: "Whether the temperature lies in the proven range" }),
  })
  .nullable()
  .meta({ description: "Null where no device could be judged" });

const zeroExtreme = z
  .object({
    serial: z.string(),
    fromC: z.number(),
    toC: z.number(),
    shiftIntervals: z.number(),
    ratio: z.number().meta({ description: "Share of the limit at minimum load; at most 1 is inside" }),
    proven: z.boolean(),
  })
  .nullable();

const envelopeSide = z.object({
  span: spanExtreme,
  zero: zeroExtreme,
  spanDevices: z.number().int().meta({ description: "How many were judged" }),
  zeroDevices: z.number().int(),
});

export const envelopeSurvey = z
  .object({
    before: envelopeSide.meta({ description: "As if trimmed at the reference only" }),
    after: envelopeSide,
    notProvenC: z
      .array(z.tuple([z.number(), z.number()]))
      .meta({ description: "Parts of the family's range for which nothing is proven, °C" }),
  })
  .meta({ description: "The worst devices against OIML R 60. A class is proven by type approval, not here" });
