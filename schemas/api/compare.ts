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

const packageFacts = z.object({
  id,
  lot: z.string(),
  family: z.string(),
  version: z.string(),
  layout: z.string(),
  state: z.string(),
  digest: sha256Hex.nullable(),
});

export type ComparedPackage = z.output<typeof packageFacts>;

export const comparison = pageOf(comparedDevice).extend({
  from: packageFacts,
  to: packageFacts,
  counts: changeCounts.meta({ description: "Over all serials, not only those of the page" }),
  fields: z.array(fieldSummary).meta({ description: "Changed fields, over all serials" }),
});

export type Comparison = z.output<typeof comparison>;

const twoPackages = {
  from: id.meta({ description: "The older package" }),
  to: id.meta({ description: "The newer package, of whatever lot" }),
};

export const overviewQuery = z.object(twoPackages);

const histogram = z.object({
  in: z.enum(["steps", "unit"]).meta({ description: "Whether edges are stored steps or in the field's unit" }),
  from: z.number().meta({ description: "Lower edge of the first bin" }),
  width: z.number().positive(),
  counts: z.array(count),
});

export const comparisonOverview = z.object({
  from: packageFacts,
  to: packageFacts,
  counts: changeCounts,
  fields: z.array(
    fieldSummary.extend({
      parameter: z.boolean().meta({ description: "Carries a value: no version number, no checksum" }),
      histogram: histogram
        .nullable()
        .meta({ description: "Of the difference, newer less older, over the serials in which it differs" }),
    }),
  ),
});

export type ComparisonOverview = z.output<typeof comparisonOverview>;

const selection = {
  ...twoPackages,
  change: z.enum(CHANGES).optional(),
  field: z.string().max(64).optional().meta({ description: "Only serials in which this field differs" }),
  least: z.coerce.number().min(0).optional().meta({
    description: "And by at least so much: in stored steps where the field has them, else in its unit",
  }),
  search: z.string().trim().max(32).optional().meta({ description: "Part of a serial" }),
  sort: z.string().max(65).default("serial").meta({
    description: "serial, largest (the largest step of any parameter), or a field's name; a minus before it: falling",
    example: "-largest",
  }),
};

export const changedSerialsQuery = z.object({
  ...selection,
  offset: z.coerce.number().int().min(0).max(200_000).default(0),
  limit: z.coerce.number().int().min(1).max(500).default(200),
});

export type ChangedSerialsQuery = z.output<typeof changedSerialsQuery>;

export const changedSerials = z.object({
  total: count.nullable().meta({ description: "Serials selected; null while not all are compared yet" }),
  offset: count,
  items: z.array(comparedDevice),
});

export type ChangedSerials = z.output<typeof changedSerials>;

export const comparisonExportQuery = z.object({ ...selection, format: z.enum(["csv", "json"]) });

export type ComparisonExportQuery = z.output<typeof comparisonExportQuery>;

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

export const compareFileQuery = z.object({
  package: id.meta({ description: "Package that holds the image" }),
  serial: code,
});

export const fileComparison = z.object({
  image,
  file: z.object({
    bytes: z.string().meta({ description: "The layout's memory out of the file, as hex" }),
    checksums: z.array(z.object({ name: z.string(), ok: z.boolean() })),
  }),
  change: z.enum(["same", "values", "version-only"]),
  fields: z.array(fieldDifference).meta({ description: "from: the image; to: the file" }),
  bytes: z.array(byteDifference),
});

export type FileComparison = z.output<typeof fileComparison>;

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
