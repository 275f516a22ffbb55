import { z } from "zod";
import { code, id, pageOf, pageQuery, sha256Hex } from "./common";

export const imageQuery = pageQuery.extend({
  search: z.string().trim().max(32).optional().meta({ description: "Part of a serial" }),
  values: z.enum(["true", "false"]).default("false").meta({ description: "With the decoded fields of each image" }),
});

export type ImageQuery = z.output<typeof imageQuery>;

export const byImage = z.object({ id, serial: code });

export const decodedField = z.object({
  name: z.string(),
  at: z.number().int().meta({ description: "Offset in the image" }),
  length: z.number().int().meta({ description: "Bytes" }),
  raw: z.string().meta({ description: "Lower-case hex of the stored bytes" }),
  value: z.union([z.number(), z.string()]).nullable().meta({ description: "Null where the bytes hold no value" }),
  unit: z.string().nullable(),
  source: z.string().nullable().meta({ description: "Where the value comes from; null for constants and checksums" }),
});

export type DecodedFieldView = z.output<typeof decodedField>;

const imageFacts = {
  serial: z.string(),
  hardwareId: z.string().nullable(),
  length: z.number().int().meta({ description: "Bytes of the image" }),
  sha256: sha256Hex.meta({ description: "Of the image's bytes, kept ranges taken as fill" }),
  hexSha256: sha256Hex.meta({ description: "Of the Intel HEX file" }),
  derivation: id,
  coefficientSet: id,
};

export const imageSummary = z.object({ ...imageFacts, fields: z.array(decodedField).optional() });
export type ImageSummary = z.output<typeof imageSummary>;
export const imagePage = pageOf(imageSummary);

const range = z.tuple([z.number().int(), z.number().int()]);

export const image = z.object({
  ...imageFacts,
  package: id,
  version: z.string(),
  lot: z.string(),
  family: z.string(),
  layout: z.string().meta({ description: "Version of the layout" }),
  bytes: z.string().meta({ description: "The image as lower-case hex" }),
  baseAddress: z.number().int(),
  fill: z.number().int(),
  pageBytes: z.number().int(),
  kept: z.array(range).meta({ description: "Inclusive ranges that belong to the device" }),
  gaps: z.array(range).meta({ description: "Inclusive ranges that nothing covers; they hold the fill" }),
  extents: z.array(
    z.object({
      kind: z.enum(["field", "checksum", "kept", "reserved"]),
      name: z.string(),
      at: z.number().int(),
      length: z.number().int(),
      source: z.string().nullable().meta({ description: "Where a field's value comes from; null for constants" }),
    }),
  ),
  fields: z.array(decodedField),
  checksums: z.array(z.object({ name: z.string(), ok: z.boolean() })),
});

export type ImageView = z.output<typeof image>;
