import { z } from "zod";
import { readLabel } from "@/lib/domain/readings/read-cell";
import { code, id, pageOf, timestamp } from "@/schemas/api/common";

export const equipmentKind = z.enum(["sensor", "chamber", "load", "reader"]);

const certificate = z.string().trim().min(1, "Name the certificate.").max(120);
const calibratedUntil = z.iso.date("Takes a date such as 2027-03-31.").meta({ description: "Last day of validity" });
const uncertainty = z.number().min(0).max(1_000_000).meta({
  description: "Expanded uncertainty of the certificate: °C for sensor and chamber, kg for load, mV/V for reader",
});
const coverageFactor = z
  .number("Takes a number.")
  .positive("Takes a number above 0.")
  .max(100, "Takes at most 100.")
  .meta({ description: "k of the certificate's expanded uncertainties; 2 where left out" });

/** One place of a chamber as its certificate of uniformity gives it. */
export const chamberPosition = z.strictObject({
  position: z
    .string()
    .trim()
    .refine((text) => readLabel(text) !== undefined, "Takes 1 to 64 characters, starting with a letter or digit.")
    .meta({ description: "As in the readings' column position" }),
  deviationK: z
    .number("Takes a number.")
    .min(-100)
    .max(100)
    .meta({ description: "Temperature at this place less that at the reference sensor, K" }),
  uncertaintyK: z
    .number("Takes a number.")
    .min(0, "Takes 0 or more.")
    .max(100)
    .meta({ description: "Expanded uncertainty of the deviation, K, with the certificate's coverage factor" }),
});

const positions = z
  .array(chamberPosition)
  .max(200, "Takes at most 200 places.")
  .superRefine((given, ctx) => {
    for (const [index, { position }] of given.entries()) {
      if (given.findIndex((one) => one.position === position) === index) continue;
      ctx.addIssue({ code: "custom", path: [index, "position"], message: "This place stands in the list already." });
    }
  })
  .meta({ description: "Places of a chamber with their deviations; empty for everything else" });

export const newEquipment = z
  .strictObject({
    code,
    kind: equipmentKind,
    certificate,
    calibratedUntil,
    uncertainty,
    coverageFactor: coverageFactor.default(2),
    positions: positions.default([]),
  })
  .refine(({ kind, positions: given }) => kind === "chamber" || given.length === 0, {
    path: ["positions"],
    message: "Only a chamber has places.",
  });

export const equipmentChange = z
  .strictObject({
    certificate: certificate.optional(),
    calibratedUntil: calibratedUntil.optional(),
    uncertainty: uncertainty.optional(),
    coverageFactor: coverageFactor.optional(),
    positions: positions.optional(),
  })
  .refine((change) => Object.values(change).some((value) => value !== undefined), "Name at least one value to change.");

export const equipment = z.object({
  id,
  code,
  kind: equipmentKind,
  certificate: z.string(),
  calibratedUntil: z.string(),
  uncertainty: z.number(),
  coverageFactor: z.number(),
  positions: z.array(chamberPosition),
  createdAt: timestamp,
  updatedAt: timestamp,
});

export const equipmentList = pageOf(equipment);

/** A run that used a piece of equipment, with its certificate as it stood then. */
export const equipmentUse = z.object({
  run: id,
  lot: z.string(),
  purpose: z.string(),
  createdAt: timestamp,
  devices: z.number().int(),
  counted: z.boolean().meta({ description: "False where a later run superseded it" }),
  certificate: z.string(),
  calibratedUntil: z.string(),
  uncertainty: z.number(),
  coverageFactor: z.number(),
  positions: z.array(chamberPosition),
});

export const equipmentUsePage = pageOf(equipmentUse);

export type EquipmentUse = z.output<typeof equipmentUse>;
export type ChamberPosition = z.output<typeof chamberPosition>;
export type NewEquipment = z.output<typeof newEquipment>;
export type EquipmentChange = z.output<typeof equipmentChange>;
