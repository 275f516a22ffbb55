import { formatGiven, formatNumberOf } from "@/lib/domain/format/figure";
import { devices, type PackageCheck } from "./check";

/** The values of one field over all devices, as decoded from the images. */
export interface FieldExtremes {
  name: string;
  unit: string | null;
  /** Limits of the layout; null where it names none. */
  min: number | null;
  max: number | null;
  /** How far a decoded value may lie from the one that was stored: half a step, or the rounding of the float. */
  tolerance: number;
  lowest: { value: number; serial: string };
  highest: { value: number; serial: string };
}

/** Digits of a value in the message; the evidence has all of them. */
const TOLD_DIGITS = 7;

interface Approach {
  field: FieldExtremes;
  serial: string;
  value: number;
  limit: number;
  /** Distance to the limit as a share of the room between the limits (of the limit where there is only one); negative outside. */
  room: number;
}

function approachesOf(field: FieldExtremes): Approach[] {
  const { min, max, lowest, highest } = field;
  const width = min !== null && max !== null ? max - min : Math.abs((min ?? max) as number);
  const scale = width > 0 ? width : 1;
  const approaches: Approach[] = [];
  if (min !== null) approaches.push({ field, ...lowest, limit: min, room: (lowest.value - min) / scale });
  if (max !== null) approaches.push({ field, ...highest, limit: max, room: (max - highest.value) / scale });
  return approaches;
}

const isOutside = ({ field, value, limit }: Approach) =>
  limit === field.min ? value < limit - field.tolerance : value > limit + field.tolerance;

/** Whether the values that the images hold lie within the layout's limits, and how near they come. */
export function checkLimits(packed: number, fields: readonly FieldExtremes[]): PackageCheck {
  const limited = fields.filter((field) => field.min !== null || field.max !== null);
  const approaches = limited.flatMap(approachesOf).sort((a, b) => a.room - b.room);
  const outside = approaches.filter(isOutside);
  const evidence = {
    devices: packed,
    fields: limited.map(({ name, unit, min, max, lowest, highest }) => ({ name, unit, min, max, lowest, highest })),
  };
  const told = ({ field, serial, value, limit }: Approach) =>
    `${field.name} of ${serial}: ${formatGiven(Number(value.toPrecision(TOLD_DIGITS)))}${field.unit ? ` ${field.unit}` : ""}, limit ${formatGiven(limit)}`;
  const [nearest] = approaches;
  if (outside[0])
    return {
      code: "limits",
      verdict: "fail",
      message: `${formatNumberOf(outside.length, "value lies", "values lie")} outside the layout's limits, worst ${told(outside[0])}.`,
      evidence,
    };
  const message = nearest
    ? `Decoded again, the values of ${devices(packed)} lie within the limits of ${formatNumberOf(limited.length, "field")}. Nearest to one: ${told(nearest)}.`
    : "The layout sets no limits.";
  return { code: "limits", verdict: "pass", message, evidence };
}
