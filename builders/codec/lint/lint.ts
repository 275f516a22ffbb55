import semver from "semver";
import { findFieldWidth } from "@/builders/codec/field-types";
import { type LayoutCell, listCells } from "@/builders/codec/layout-cells";
import { lintPlacement } from "@/builders/codec/lint/lint-placement";
import { lintResolution, lintWideFractions, listResolutions } from "@/builders/codec/lint/lint-resolution";
import { fits } from "@/builders/codec/lint/lint-scaled";
import { readLayout } from "@/builders/codec/lint/lint-shape";
import { listStructureProblems } from "@/builders/codec/lint/lint-structure";
import { coefficientsOfOrder } from "@/builders/codec/sources";
import { isFirmwareRange, isRangeText, mayShareFirmware } from "@/lib/domain/firmware-range";
import { assertStepCovers, layoutStep, newestLower, type Step } from "@/lib/domain/semver-step";
import { AppError, type Problem } from "@/lib/errors";
import type { LayoutDocument } from "@/schemas/documents/layout";

/** What of a family the rules look at: its code, what its sources give (°C, kg, mV/V), its temperatures and Y = E_max / v_min. */
export interface FamilyRulesLike {
  code: string;
  referenceC: number;
  capacityKg: number;
  nominalMvV: number;
  vMinRatioY?: number;
  temperatureMinC?: number;
  temperatureMaxC?: number;
}

export interface LintOptions {
  family?: FamilyRulesLike;
  /** Published layouts of the family, in any order; retired ones among them. */
  publishedVersions?: readonly LayoutDocument[];
  /** Length of the longest serial that the family has. */
  existingSerialLengthMax?: number;
  /** The version whose draft the document is; naming another one in it is an error. */
  draftVersion?: string;
}

export interface LintResult {
  /** What stands against publishing and encoding. */
  errors: Problem[];
  /** What a careful author looks at. */
  warnings: Problem[];
  /** Smallest version step against the newest published lower version; null where there is none. */
  step: Step | null;
}

/**
 * Judges a layout by its meaning. Takes documents of any shape, so that it serves the editor while they are typed; the
 * JSON Schema is the full judge of shape. Paths are JSON pointers (RFC 6901).
 */
export function lintLayout(document: unknown, options: LintOptions = {}): LintResult {
  const errors = listStructureProblems(document);
  const { readable } = readLayout(document);
  if (!readable) return { errors, warnings: [], step: null };
  const { layout, paths } = readable;
  const versions = lintVersions(layout, options.publishedVersions ?? []);
  errors.push(...lintDraftVersion(layout, options.draftVersion));
  const cells = layout.fields.flatMap((field, i) => listCells(field, paths.fields[i] as string));
  errors.push(...lintFamily(layout, options.family), ...lintCoefficients(layout, cells));
  errors.push(...lintKnownValues(layout, cells, options.family), ...versions.errors);
  const warnings = [
    ...lintPlacement(layout, paths),
    ...lintResolution(listResolutions(layout, paths.fields, options.family)),
    ...lintWideFractions(layout, paths.fields),
    ...lintSerial(layout, paths.fields, options),
    ...versions.warnings,
  ];
  return { errors, warnings, step: versions.step };
}

/** Lists whose findings of meaning are about what is missing in them, which no finding of shape says. */
const LISTS = ["/fields", "/checksums"];
/** A part's member, such as its algorithm; of a part as a whole, meaning speaks of more than the members do. */
const MEMBER_OF_PART = /^\/(?:fields|checksums)\/\d+\/./;

/**
 * Findings of shape and of meaning together. Where the shape is wrong, what the meaning says of the same place would only say
 * it again.
 */
export function joinShape(shape: readonly Problem[], { errors, ...rest }: LintResult): LintResult {
  const told = new Set(shape.map((problem) => problem.path));
  const toldBelow = (path: string) => shape.some((problem) => problem.path.startsWith(`${path}/`));
  const repeats = ({ path, code }: Problem) => {
    if (code === "layout.shape") return told.has(path) || toldBelow(path);
    return (told.has(path) && !LISTS.includes(path)) || (MEMBER_OF_PART.test(path) && toldBelow(path));
  };
  return { errors: [...shape, ...errors.filter((error) => !repeats(error))], ...rest };
}

function lintFamily(layout: LayoutDocument, family: FamilyRulesLike | undefined): Problem[] {
  if (!family || layout.family === family.code) return [];
  return [
    {
      path: "/family",
      code: "layout.family_mismatch",
      message: `The layout is for “${layout.family}”, not ${family.code}`,
    },
  ];
}

/** Firmware computes with every coefficient of the order, so a missing one is wrong bytes, and one too many has no value. */
function lintCoefficients(layout: LayoutDocument, cells: readonly LayoutCell[]): Problem[] {
  const needed = coefficientsOfOrder(layout.order).map((name) => `coefficients.${name}`);
  const used = new Set<string>(cells.flatMap(({ value }) => ("from" in value ? [value.from] : [])));
  const missing = needed.filter((name) => !used.has(name));
  const beyond = layout.order === 1 ? ["coefficients.zeroTc2", "coefficients.gainTc2"] : [];
  return [
    ...missing.map((name) => ({
      path: "/fields",
      code: "layout.coefficient_missing",
      message: `No field holds ${name}, which order ${layout.order} needs`,
    })),
    ...cells.flatMap(({ value, path }) =>
      "from" in value && beyond.includes(value.from)
        ? [{ path: `${path}/value/from`, code: "field.order_exceeded", message: `Order 1 has no ${value.from}` }]
        : [],
    ),
  ];
}

/** Values that are known before any device is: the layout's own version and the family's. */
function lintKnownValues(
  layout: LayoutDocument,
  cells: readonly LayoutCell[],
  family: FamilyRulesLike | undefined,
): Problem[] {
  const version = semver.parse(layout.version);
  const known: Record<string, number | undefined> = {
    "layout.major": version?.major,
    "layout.minor": version?.minor,
    "layout.patch": version?.patch,
    "family.referenceTemperature": family?.referenceC,
    "family.capacity": family?.capacityKg,
    "family.nominalOutput": family?.nominalMvV,
  };
  return cells.flatMap((cell) => {
    const value = "from" in cell.value ? known[cell.value.from] : undefined;
    if (value === undefined || takes(cell, value)) return [];
    const message = `“${cell.name}” cannot take ${value}, which is its value here`;
    return [{ path: cell.path, code: "field.value_out_of_range", message }];
  });
}

function takes({ number, names, min, max, scale, bias }: LayoutCell, value: number): boolean {
  if (!number) return true;
  if (names) return Object.values(names).includes(value);
  return value >= (min ?? value) && value <= (max ?? value) && fits({ scale, bias }, number, value);
}

function lintSerial(layout: LayoutDocument, paths: readonly string[], options: LintOptions): Problem[] {
  const at = layout.fields.findIndex((field) => "from" in field.value && field.value.from === "device.serial");
  const field = layout.fields[at];
  if (!field) {
    const message = "No field holds the serial, so a read image does not tell whose it is";
    return [{ path: "/fields", code: "layout.serial_missing", message }];
  }
  const width = findFieldWidth(field);
  const longest = options.existingSerialLengthMax ?? 0;
  if (width === undefined || longest <= width) return [];
  const message = `“${field.name}” holds ${width} characters, the family has serials of ${longest}`;
  return [{ path: `${paths[at]}/length`, code: "field.serial_too_short", message }];
}

function lintDraftVersion({ version }: LayoutDocument, draftVersion: string | undefined): Problem[] {
  if (draftVersion === undefined || version === draftVersion) return [];
  const message = `This is the draft of ${draftVersion}; ${version} is another layout`;
  return [{ path: "/version", code: "layout.version_differs", message }];
}

function lintVersions(layout: LayoutDocument, published: readonly LayoutDocument[]): LintResult {
  const errors: Problem[] = [];
  const { version, firmware } = layout;
  const add = (path: string, code: string, message: string) => errors.push({ path, code, message });
  const versionOk = typeof version === "string" && /^\d+\.\d+\.\d+$/.test(version) && semver.valid(version) === version;
  if (!versionOk) add("/version", "layout.version_invalid", "needs three numbers, such as 1.0.0");
  const ranged = typeof firmware === "string" && isRangeText(firmware);
  if (!ranged) add("/firmware", "firmware.range_invalid", "is not a range of versions, such as >=2.1.0 <3.0.0");
  else if (!isFirmwareRange(firmware)) add("/firmware", "firmware.range_empty", "no version satisfies this range");
  if (!versionOk || !ranged) return { errors, warnings: [], step: null };
  if (published.some((one) => one.version === version)) {
    add("/version", "layout.version_taken", `${version} is published already`);
  }
  const previous = newestLower(published, version);
  const { step } = layoutStep(previous, layout);
  const refused = refusalOf(() => assertStepCovers(previous?.version ?? null, version, step));
  if (refused) add("/version", refused.code, refused.message);
  return { errors, warnings: sharedFirmware(layout, published), step };
}

function sharedFirmware(layout: LayoutDocument, published: readonly LayoutDocument[]): Problem[] {
  const others = published.filter(
    (one) => one.version !== layout.version && mayShareFirmware(one.firmware, layout.firmware),
  );
  if (others.length === 0) return [];
  const versions = others.map((one) => one.version).join(", ");
  const message =
    others.length === 1
      ? `Layout ${versions} is for some of the same firmware`
      : `Layouts ${versions} are for some of the same firmware`;
  return [{ path: "/firmware", code: "firmware.shared", message }];
}

function refusalOf(check: () => void): AppError | undefined {
  try {
    check();
    return undefined;
  } catch (error) {
    if (error instanceof AppError) return error;
    throw error;
  }
}
