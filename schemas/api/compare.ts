import { z } from "zod";
import { code, id, pageOf, pageQuery, sha256Hex, version } from "./common";
import { image } from "./images";

export const CHANGES = ["added", "removed", "values", "version-only"] as const;

export const compareQuery = pageQuery.extend({
  from: id.meta({ description: "The older package" }),
  to: id.meta({ description: "The newer package, of whatever lot" }),
  change: z.enum(CHANGES).optional().meta({ description: "Only serials with this change" }),
  search: z.string().trim().max(32).optional().meta({ description: "Part of a serial" }),
});

export type CompareQuery = z.output<typeof compareQuery>;

const value = z.union([z.number(), z.string()]).nullable();

export const fieldDifference = z.object({
  name: z.string(),
  from: value,
  to: value,
  unit: z.string().nullable(),
  steps: z
    .number()
    .int()
    .nullable()
    .meta({ description: "Difference of the stored integers; null for floats and texts" }),
});

export const byteDifference = z.object({
  at: z.number().int(),
  from: z.number().int().nullable().meta({ description: "0…255; null beyond the end" }),
  to: z.number().int().nullable(),
});

export const comparedDevice = z.object({
  serial: z.string(),
  change: z
    .enum(CHANGES)
    .meta({ description: "version-only: nothing but package, layout numbers and the checksums over them" }),
  fields: z.array(fieldDifference).meta({ description: "Of an added or removed serial: all fields" }),
  bytes: z.array(byteDifference).meta({ description: "Empty for an added or removed serial: all bytes" }),
});

export type ComparedDevice = z.output<typeof comparedDevice>;

const count = z.number().int();

export const changeCounts = z.object({
  added: count,
  removed: count,
  values: count,
  "version-only": count,
  same: count.meta({ description: "Serials whose bytes are equal; they are not listed" }),
});

export type ChangeCounts = z.output<typeof changeCounts>;

/** How one field changed over all serials that both packages hold. */
export const fieldSummary = z.object({
  name: z.string(),
  unit: z.string().nullable(),
  devices: count,
  stepsMin: z.number().int().nullable(),
  stepsMax: z.number().int().nullable(),
});

export type FieldSummary = z.output<typeof fieldSummary>;

const comparedPackage = z.object({
  id,
  lot: z.string(),
  family: z.string(),
  version: z.string(),
  layout: z.string(),
  state: z.string(),
  digest: sha256Hex.nullable(),
});

export const comparison = pageOf(comparedDevice).extend({
  from: comparedPackage,
  to: comparedPackage,
  counts: changeCounts.meta({ description: "Over all serials, not only those of the page" }),
  fields: z.array(fieldSummary).meta({ description: "Changed fields, over all serials" }),
});

export type Comparison = z.output<typeof comparison>;

export const compareImagesQuery = z.object({
  from: id.meta({ description: "The older package" }),
  to: id.meta({ description: "The newer package" }),
  serial: code,
  toSerial: code.optional().meta({ description: "Serial in the newer package, where it is another one" }),
});

export const imageComparison = z.object({
  from: image,
  to: image,
  change: z.enum(["same", "values", "version-only"]),
  fields: z.array(fieldDifference),
  bytes: z.array(byteDifference),
});

export const compareLayoutsQuery = z.object({ family: code, from: version, to: version });

export const layoutComparison = z.object({
  family: z.string(),
  from: version,
  to: version,
  step: z.enum(["major", "minor", "patch"]).meta({ description: "Smallest version step that the differences allow" }),
  changes: z.array(
    z.object({
      path: z
        .string()
        .meta({ description: "JSON pointer into the newer document, or into the older one for what is gone" }),
      step: z.enum(["major", "minor", "patch"]),
      message: z.string(),
    }),
  ),
});
