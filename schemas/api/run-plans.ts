import { z } from "zod";
import { POSITION_FORM } from "@/lib/domain/run-plan/positions";
import { code, id, idPageQuery, pageOf, reason, timestamp } from "@/schemas/api/common";
import { LOT_DEVICES_MAX } from "@/schemas/api/lots";
import { purpose, severity } from "@/schemas/api/runs";

const position = z
  .string()
  .trim()
  .regex(POSITION_FORM, "Takes 1 to 32 characters, starting with a letter or digit.")
  .meta({ description: "Place in the chamber, as it is labelled there", example: "P01" });

const loadKg = z
  .number()
  .positive("A load is above 0; the unloaded reading is always planned.")
  .max(10_000_000)
  .meta({ description: "Applied load above the fixture's dead load, kg" });

export const plannedPoint = z.strictObject({
  point: z
    .number()
    .int()
    .min(-999_999_999)
    .max(999_999_999)
    .meta({ description: "Names the temperature in the readings" }),
  setC: z.number().min(-100).max(250).meta({ description: "Set point of the chamber, °C" }),
  soakMin: z.number().min(0).max(10_080).meta({ description: "Minutes once the chamber stays within 0.5 K" }),
  loadsKg: z.array(loadKg).max(20).default([]),
  repeats: z.number().int().min(1).max(50).default(1),
  dwellS: z.number().min(0).max(86_400).default(0).meta({ description: "Seconds under load before a reading" }),
});

const plannedDevice = z.strictObject({ serial: code, position });

export const newRunPlan = z.strictObject({
  name: z.string().trim().min(1, "Name the plan.").max(80),
  purpose,
  devices: z.array(plannedDevice).min(1, "Name at least one device.").max(LOT_DEVICES_MAX),
  points: z.array(plannedPoint).min(1, "Name at least one temperature.").max(50),
  equipment: z.array(code).max(50).default([]),
  notes: z.string().trim().max(4_000).optional(),
  sampleDraw: id.optional().meta({ description: "Draw that the devices come from" }),
});

export type NewRunPlan = z.output<typeof newRunPlan>;

/** A plan that is still being written: devices and temperatures as far as they are there. */
export const runPlanDraft = z.strictObject({
  purpose,
  devices: z.array(z.strictObject({ serial: code, position: z.string().trim().max(64) })).max(LOT_DEVICES_MAX),
  points: z.array(plannedPoint).max(50),
  equipment: z.array(code).max(50).default([]),
});

export type RunPlanDraft = z.output<typeof runPlanDraft>;

export const runPlanState = z.enum(["planned", "used", "dropped"]);

export const planFinding = z.object({
  code: z.string(),
  severity,
  part: z.enum(["devices", "points", "equipment"]),
  serial: z.string().nullable(),
  point: z.number().int().nullable(),
  message: z.string(),
  data: z.record(z.string(), z.unknown()),
});

const summaryMembers = {
  id,
  lot: z.string(),
  name: z.string(),
  purpose,
  state: runPlanState,
  deviceCount: z.number().int(),
  points: z.array(plannedPoint),
  equipmentCodes: z.array(z.string()),
  createdAt: timestamp,
  createdBy: z.string(),
};

export const runPlanSummary = z.object(summaryMembers);
export type RunPlanSummary = z.output<typeof runPlanSummary>;
export const runPlanPage = pageOf(runPlanSummary);
export const runPlanQuery = idPageQuery.extend({ state: runPlanState.optional() });

export const runPlan = z
  .object({
    ...summaryMembers,
    devices: z.array(z.object({ serial: z.string(), position: z.string() })).meta({ description: "In working order" }),
    equipment: z.array(
      z.object({
        code: z.string(),
        kind: z.string(),
        certificate: z.string(),
        calibratedUntil: z.iso.date(),
        uncertainty: z.number(),
      }),
    ),
    notes: z.string().nullable(),
    sampleDraw: z
      .object({ id, seed: z.string(), count: z.number().int() })
      .nullable()
      .meta({ description: "Draw that the devices come from" }),
    rows: z.number().int().meta({ description: "Readings it asks for" }),
    findings: z
      .array(planFinding)
      .meta({ description: "What is to be said of it as things stand now; none once it is used or dropped" }),
    runs: z
      .array(z.object({ id, createdAt: timestamp, supersededBy: id.nullable() }))
      .meta({ description: "Runs that were uploaded for it, oldest first" }),
    dropped: z.object({ reason: z.string(), by: z.string(), at: timestamp }).nullable(),
  })
  .meta({ description: "What is to be done in one chamber session" });

export type RunPlanView = z.output<typeof runPlan>;

export const runPlanCheck = z.object({
  findings: z.array(planFinding),
  rows: z.number().int().meta({ description: "Readings it asks for" }),
});

export type RunPlanCheck = z.output<typeof runPlanCheck>;

export const dropRunPlan = z.strictObject({ reason });
