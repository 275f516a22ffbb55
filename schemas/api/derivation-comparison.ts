import { z } from "zod";
import { id, pageQuery } from "./common";
import { derivationState, pooled } from "./derivations";

export const SET_CHANGES = ["values", "added", "removed"] as const;

export const compareDerivationsQuery = pageQuery.extend({
  from: id.meta({ description: "The derivation that the other one is held against" }),
  to: id.meta({ description: "A derivation of the same lot" }),
  change: z.enum(SET_CHANGES).optional().meta({ description: "Only devices with this change" }),
});

export type CompareDerivationsQuery = z.output<typeof compareDerivationsQuery>;

const numberOrNull = z.number().nullable();

export const comparedSet = z.object({
  serial: z.string(),
  change: z.enum(SET_CHANGES),
  role: z.object({ from: z.string().nullable(), to: z.string().nullable() }),
  coefficients: z
    .array(z.object({ name: z.string(), from: numberOrNull, to: numberOrNull, step: numberOrNull, unit: z.string() }))
    .meta({ description: "Those that differ; of an added or removed device all of them. Stored units" }),
  effectV: numberOrNull.meta({
    description:
      "What the reading at capacity changes by where it changes most over the range, in verification intervals",
  }),
  effectAtC: numberOrNull.meta({ description: "The chamber temperature at which it does, °C" }),
});

export type ComparedSet = z.output<typeof comparedSet>;

const side = z.object({
  id,
  state: derivationState,
  method: z.enum(["individual", "pooled-gain", "import"]),
  order: z.number().int(),
  engine: z.string(),
  createdAt: z.string(),
  createdBy: z.string(),
  provenRange: z.tuple([z.number(), z.number()]).nullable(),
  pooled: pooled.nullable(),
  devices: z.number().int(),
  withValues: z.number().int(),
  findings: z.object({ hard: z.number().int(), soft: z.number().int(), note: z.number().int() }),
  runs: z.array(z.object({ id, purpose: z.string(), createdAt: z.string() })),
  exclude: z.array(z.object({ serial: z.string(), reason: z.string() })),
});

export const derivationComparison = z.object({
  lot: z.string(),
  from: side,
  to: side,
  rangeC: z.tuple([z.number(), z.number()]).meta({ description: "Over which effects are stated, °C" }),
  proven: z.boolean().meta({ description: "Whether both derivations prove that range" }),
  counts: z.object({
    values: z.number().int(),
    added: z.number().int(),
    removed: z.number().int(),
    same: z.number().int().meta({ description: "Devices with equal values or without any on both sides; not listed" }),
  }),
  largestEffectV: numberOrNull,
  items: z.array(comparedSet).meta({ description: "Largest effect first, then added and removed devices by serial" }),
  next: z.string().nullable(),
});

export type DerivationComparison = z.output<typeof derivationComparison>;
export type ComparisonSide = z.output<typeof side>;
