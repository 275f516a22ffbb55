import { findFieldNumber, findNumberType, scaleOf } from "@/builders/codec/field-types";
import type { FamilyRulesLike } from "@/builders/codec/lint/lint";
import type { Problem } from "@/lib/errors";
import type { LayoutDocument, LayoutField, SourceName } from "@/schemas/documents/layout";

/** What one step of a stored coefficient does to the output. */
export interface Resolution {
  /** JSON pointer of the field. */
  path: string;
  name: string;
  /** Value of one step, in `unit`. */
  step: number;
  unit: string | null;
  /** Largest change of the output by one step, in minimum verification intervals v_min, within `overK` of the reference. */
  vMin: number;
  overK: number;
}

/** A step may move the output by this share of v_min, so that its rounding takes a twentieth; common practice, no source. */
const STEP_SHARE = 0.1;

type Weight = (nominalMvV: number, overK: number) => number;

/** Output in mV/V for a step of 1, at capacity and at the far end of the temperatures (contract, section 3). */
const WEIGHTS: Partial<Record<SourceName, Weight>> = {
  "coefficients.zero": () => 1,
  "coefficients.zeroTc": (_, k) => k,
  "coefficients.zeroTc2": (_, k) => k * k,
  "coefficients.gain": (n) => n,
  "coefficients.gainTc": (n, k) => n * k,
  "coefficients.gainTc2": (n, k) => n * k * k,
};

/**
 * Steps of the integer fields that hold coefficients, against v_min = nominal output / Y (OIML R 60: Y = E_max / v_min).
 * Empty without a family that names Y and its temperatures. Floats have no step of their own and are left out.
 */
export function listResolutions(
  layout: Pick<LayoutDocument, "fields">,
  paths: readonly string[],
  family: FamilyRulesLike | undefined,
): Resolution[] {
  if (!family?.vMinRatioY) return [];
  const { temperatureMinC = family.referenceC, temperatureMaxC = family.referenceC } = family;
  const overK = Math.max(family.referenceC - temperatureMinC, temperatureMaxC - family.referenceC);
  const vMinMvV = family.nominalMvV / family.vMinRatioY;
  return layout.fields.flatMap((field, i) => {
    const weight = "from" in field.value ? WEIGHTS[field.value.from] : undefined;
    const step = stepOf(field);
    if (!weight || !step) return [];
    const vMin = (step * weight(family.nominalMvV, overK)) / vMinMvV;
    return [{ path: paths[i] as string, name: field.name, step, unit: field.unit ?? null, vMin, overK }];
  });
}

/** Value of one stored step; undefined for what is not stored as an integer. */
export function stepOf(field: Omit<LayoutField, "name" | "at" | "value">): number | undefined {
  return findFieldNumber(field)?.kind === "integer" ? Math.abs(scaleOf(field)) : undefined;
}

/** The largest step that is fine enough. */
export function finestNeeded({ step, vMin }: Resolution): number {
  return (step * STEP_SHARE) / vMin;
}

/** Warnings about coefficients stored more coarsely than the cell resolves. */
export function lintResolution(resolutions: readonly Resolution[]): Problem[] {
  return resolutions.flatMap(({ path, name, step, unit, vMin, overK }) => {
    if (vMin <= STEP_SHARE) return [];
    const over = overK > 0 && /Tc/.test(name) ? ` over ${overK} K` : "";
    const message = `“${name}” is stored coarsely: one step of ${step}${unit && unit !== "1" ? ` ${unit}` : ""} moves the output by ${vMin.toPrecision(2)} v_min${over}`;
    return [{ path: `${path}/scale`, code: "field.scale_coarse", message }];
  });
}

/**
 * Warnings about coefficients in 64-bit integers, which have no scale: of a gain of 1.0025 nothing but 1 is left. Such an
 * integer can be meant for a counter or a large constant, never for a fraction; it can be encoded all the same.
 */
export function lintWideFractions({ fields }: Pick<LayoutDocument, "fields">, paths: readonly string[]): Problem[] {
  return fields.flatMap(({ name, type, value }, i) => {
    if (!("from" in value) || !value.from.startsWith("coefficients.")) return [];
    if (findNumberType(type)?.kind !== "wide") return [];
    const message = `“${name}” keeps whole numbers only: ${type} has no scale, and ${value.from} is a fraction. Take ${type[0]}32 with a scale, fixed, f32 or f64`;
    return [{ path: `${paths[i]}/type`, code: "field.fraction_lost", message }];
  });
}
