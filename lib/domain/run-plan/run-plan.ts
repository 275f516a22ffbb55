import type { Purpose } from "@/lib/domain/compensation/types";

/** One temperature of a planned run. Loads in kg above the fixture's dead load; the unloaded reading is always taken. */
export interface PlannedPoint {
  /** Integer that names the point in the readings. */
  point: number;
  /** Set point of the chamber, °C. */
  setC: number;
  /** Minutes to wait once the chamber stays within 0.5 K. */
  soakMin: number;
  /** Applied after the unloaded reading, in this order; empty for an unloaded point. */
  loadsKg: readonly number[];
  /** How often each device is read unloaded and at each load. */
  repeats: number;
  /** Seconds under load before a loaded reading. */
  dwellS: number;
}

export interface PlannedDevice {
  serial: string;
  /** Place in the chamber, as it is labelled there. */
  position: string;
}

/** What is to be done in one chamber session; devices and points in working order. */
export interface RunPlan {
  purpose: Purpose;
  devices: readonly PlannedDevice[];
  points: readonly PlannedPoint[];
}

/** Rows that a run takes at most; the reader of uploads refuses more. */
export const PLAN_ROWS_MAX = 600_000;

/** How many readings a plan asks for. */
export function countPlannedRows({ devices, points }: RunPlan): number {
  return devices.length * points.reduce((sum, point) => sum + point.repeats * (1 + point.loadsKg.length), 0);
}

/** Least time in the chamber, min: the soaks without the ways between them and the readings. */
export function soakMinutesOf(points: readonly PlannedPoint[]): number {
  return points.reduce((sum, point) => sum + point.soakMin, 0);
}

export interface PlannedReading {
  serial: string;
  position: string;
  point: number;
  loadKg: number;
}

/** Readings in working order: point by point, place by place, unloaded first, then each load; repeats of a place together. */
export function* plannedReadings({ devices, points }: RunPlan): Generator<PlannedReading> {
  for (const { point, loadsKg, repeats } of points)
    for (const { serial, position } of devices)
      for (let repeat = 0; repeat < repeats; repeat++)
        for (const loadKg of [0, ...loadsKg]) yield { serial, position, point, loadKg };
}
