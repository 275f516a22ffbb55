import { z } from "zod";
import { code, id, pageOf, timestamp } from "@/schemas/api/common";

export const equipmentKind = z.enum(["sensor", "chamber", "load", "reader"]);

const certificate = z.string().trim().min(1, "Name the certificate.").max(120);
const calibratedUntil = z.iso.date("Takes a date such as 2027-03-31.").meta({ description: "Last day of validity" });
const uncertainty = z.number().min(0).max(1_000_000).meta({
  description: "Expanded uncertainty of the certificate: °C for sensor and chamber, kg for load, mV/V for reader",
});

export const newEquipment = z.strictObject({ code, kind: equipmentKind, certificate, calibratedUntil, uncertainty });

export const equipmentChange = z
  .strictObject({
    certificate: certificate.optional(),
    calibratedUntil: calibratedUntil.optional(),
    uncertainty: uncertainty.optional(),
  })
  .refine((change) => Object.values(change).some((value) => value !== undefined), "Name at least one value to change.");

export const equipment = z.object({
  id,
  code,
  kind: equipmentKind,
  certificate: z.string(),
  calibratedUntil: z.string(),
  uncertainty: z.number(),
  createdAt: timestamp,
  updatedAt: timestamp,
});

export const equipmentList = pageOf(equipment);

export type NewEquipment = z.output<typeof newEquipment>;
export type EquipmentChange = z.output<typeof equipmentChange>;
