import { findNumberType } from "@/builders/codec/field-types";
import { fits } from "@/builders/codec/lint/lint-field";
import { finestNeeded, listResolutions } from "@/builders/codec/lint/lint-resolution";
import {
  fieldOf,
  type Mend,
  type MendContext,
  type Mender,
  partOf,
  setMember,
} from "@/builders/codec/mend/mend-context";
import { findFreePlace, isFree } from "@/builders/codec/mend/mend-places";
import { coefficientsOfOrder, isTextSource, SOURCE_NAMES } from "@/builders/codec/sources";
import type { CoefficientName, FieldType, LayoutField } from "@/schemas/documents/layout";

/** Units in which the coefficients are computed (contract, section 3). */
export const COEFFICIENT_UNITS: Readonly<Record<CoefficientName, string>> = {
  tempOffset: "°C",
  tempSlope: "°C/1",
  zero: "mV/V",
  zeroTc: "mV/V/K",
  zeroTc2: "mV/V/K²",
  gain: "1",
  gainTc: "1/K",
  gainTc2: "1/K²",
};

const WIDER: Readonly<Record<string, readonly FieldType[]>> = {
  u8: ["u16", "u24", "u32"],
  u16: ["u24", "u32"],
  u24: ["u32"],
  i8: ["i16", "i24", "i32"],
  i16: ["i24", "i32"],
  i24: ["i32"],
  f32: ["f64"],
};

/** Takes out the member that a finding points at. */
export const removeMember: Mender = (problem, { editor }) => {
  const name = problem.path.slice(problem.path.lastIndexOf("/") + 1);
  const edits = editor.remove(problem.path);
  return edits.length > 0 ? { label: `Take “${name}” out`, edits } : undefined;
};

export const rename: Mender = (problem, context) => {
  const path = partOf(problem.path);
  const name = JSON.parse(context.editor.raw(`${path}/name`) ?? '""') as string;
  const { fields, checksums } = context.layout;
  const taken = new Set([...fields, ...checksums].map((part) => part.name));
  let number = 2;
  while (taken.has(`${name}${number}`)) number += 1;
  const next = `${name}${number}`;
  return { label: `Call it “${next}”`, edits: setMember(context, path, "name", next) };
};

export const nearestSource: Mender = (problem, context) => {
  const field = fieldOf(problem, context);
  if (!field || !("from" in field.value)) return undefined;
  const wanted = String(field.value.from).toLowerCase();
  const wantsText = findNumberType(field.type) === undefined;
  const ranked = SOURCE_NAMES.filter((name) => isTextSource(name) === wantsText)
    .map((name) => ({ name, distance: distanceOf(wanted, name.toLowerCase()) }))
    .sort((a, b) => a.distance - b.distance);
  const [best] = ranked;
  if (!best || best.distance > Math.max(3, wanted.length / 2)) return undefined;
  return { label: `Take ${best.name}`, edits: setMember(context, `${partOf(problem.path)}/value`, "from", best.name) };
};

/** Steps of typing between two words (Levenshtein). */
function distanceOf(a: string, b: string): number {
  let row = Array.from({ length: b.length + 1 }, (_, j) => j);
  for (let i = 1; i <= a.length; i++) {
    const next = [i];
    for (let j = 1; j <= b.length; j++) {
      const swap = (row[j - 1] as number) + (a[i - 1] === b[j - 1] ? 0 : 1);
      next[j] = Math.min((row[j] as number) + 1, (next[j - 1] as number) + 1, swap);
    }
    row = next;
  }
  return row[b.length] as number;
}

/** The next wider type that takes limits and constant; moved where the bytes behind it are taken. */
export const widenType: Mender = (problem, context) => {
  const field = fieldOf(problem, context);
  if (!field) return undefined;
  const constant = "const" in field.value ? field.value.const : undefined;
  const values = [field.min, field.max, constant].filter((value) => typeof value === "number");
  const type = (WIDER[field.type] ?? []).find((name) => {
    const number = findNumberType(name);
    return number !== undefined && values.every((value) => fits(field, number, value));
  });
  return type && widthMend(problem.path, context, field, { type, width: findNumberType(type)?.width as number });
};

/** Gives a field more bytes in place, or at the next free place. */
function widthMend(
  pointer: string,
  context: MendContext,
  field: LayoutField,
  { type, length, width }: { type?: FieldType; length?: number; width: number },
): Mend | undefined {
  const path = partOf(pointer);
  const stays = isFree(context, field.at, width, path);
  const at = stays ? field.at : findFreePlace(context, { width, from: field.at, number: !length, except: path });
  if (at === undefined) return undefined;
  const edits = [
    ...(stays ? [] : setMember(context, path, "at", at)),
    ...setMember(context, path, type ? "type" : "length", type ?? length),
  ];
  return { label: `${type ? `Make it ${type}` : `Make it ${length} bytes`}${stays ? "" : ` at ${at}`}`, edits };
}

export const swapLimits: Mender = (problem, context) => {
  const field = fieldOf(problem, context);
  if (!field) return undefined;
  const path = partOf(problem.path);
  const edits = [...setMember(context, path, "min", field.max), ...setMember(context, path, "max", field.min)];
  return { label: "Swap the limits", edits };
};

/** A length that takes the family's longest serial; 16 where there is none yet. */
export const giveLength: Mender = (problem, context) => {
  const field = fieldOf(problem, context);
  const length = Math.max(context.options.existingSerialLengthMax ?? 0, 16);
  return field && widthMend(problem.path, context, field, { length, width: length });
};

export const lengthenSerial: Mender = (problem, context) => {
  const field = fieldOf(problem, context);
  const length = context.options.existingSerialLengthMax ?? 0;
  return field && widthMend(problem.path, context, field, { length, width: length });
};

/** The largest power of ten that is fine enough, where the type still takes the limits. */
export const refineScale: Mender = (problem, context) => {
  const field = fieldOf(problem, context);
  const path = partOf(problem.path);
  const found = field && listResolutions({ fields: [field] }, [path], context.options.family)[0];
  if (!field || !found) return undefined;
  const scale = Number(`1e${Math.floor(Math.log10(finestNeeded(found)))}`);
  const number = findNumberType(field.type);
  const limits = [field.min, field.max].filter((value) => value !== undefined);
  if (!number || !limits.every((value) => fits({ ...field, scale }, number, value))) return undefined;
  return { label: `Set the scale to ${scale}`, edits: setMember(context, path, "scale", scale) };
};

/** A field of its own for a coefficient that has none. */
export const addCoefficient: Mender = (problem, context) => {
  const { layout, editor } = context;
  const name = coefficientsOfOrder(layout.order).find((one) => problem.message.includes(`coefficients.${one},`));
  const at = findFreePlace(context, { width: 4, number: true });
  if (!name || at === undefined) return undefined;
  const named = freeName(context, name);
  const value = { from: `coefficients.${name}` };
  const edits = editor.insert("/fields", { name: named, at, type: "f32", unit: COEFFICIENT_UNITS[name], value });
  return { label: `Add “${named}” at ${at}`, edits };
};

export const addSerial: Mender = (_problem, context) => {
  const length = Math.max(context.options.existingSerialLengthMax ?? 0, 16);
  const at = findFreePlace(context, { width: length });
  if (at === undefined) return undefined;
  const name = freeName(context, "serial");
  const edits = context.editor.insert(
    "/fields",
    { name, at, type: "ascii", length, value: { from: "device.serial" } },
    0,
  );
  return { label: `Add “${name}” at ${at}`, edits };
};

function freeName({ layout }: MendContext, name: string): string {
  const taken = new Set([...layout.fields, ...layout.checksums].map((part) => part.name));
  let next = name;
  for (let number = 2; taken.has(next); number++) next = `${name}${number}`;
  return next;
}

export const removeField: Mender = (problem, context) => {
  const field = fieldOf(problem, context);
  return field && { label: `Take “${field.name}” out`, edits: context.editor.remove(partOf(problem.path)) };
};
