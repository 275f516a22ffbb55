import { compileLayout } from "@/builders/codec/compile-layout";
import { readStored } from "@/builders/codec/decode-field";
import { toHex } from "@/builders/codec/files/hex-text";
import { decodeImage, encodeImage } from "@/builders/codec/image";
import type { FamilyRulesLike } from "@/builders/codec/lint/lint";
import { sampleSources } from "@/builders/codec/sample";
import type { CoefficientValues, ImageSources } from "@/builders/codec/sources";
import { AppError } from "@/lib/errors";
import type { LayoutDocument } from "@/schemas/documents/layout";

/** A device to encode: what is left out is invented. */
export interface GivenDevice {
  serial?: string;
  lot?: string;
  coefficients?: Partial<CoefficientValues>;
}

/** One value of the sample device, as it comes, as stored and as read back. */
export interface SampleRow {
  name: string;
  /** JSON pointer of its field. */
  path: string;
  value: number | string | null;
  unit: string | null;
  /** Where its value comes from; null for constants. */
  source: string | null;
  /** The stored integer, where one is stored. */
  stored: number | null;
  /** Stored bytes, lower-case hex. */
  raw: string;
  readBack: number | string | null;
  /** Value less what is read back, in steps of the stored integer; null for what has no steps. */
  roundingSteps: number | null;
}

export interface Sample {
  serial: string;
  hex: string;
  rows: SampleRow[];
}

/** A device as a layout stores it, or why it can't be. */
export function encodeSample(
  layout: LayoutDocument,
  family: FamilyRulesLike | undefined,
  given: GivenDevice = {},
): Sample | { refusal: string } {
  try {
    const sources = withGiven(sampleSources(layout, family), given);
    const compiled = compileLayout(layout);
    const image = encodeImage(compiled, sources);
    const decoded = decodeImage(compiled, image);
    const pointers = new Map(layout.fields.map((field, i) => [field.name, `/fields/${i}`]));
    const rows = compiled.fields.map((field, i): SampleRow => {
      const value = field.read(sources) ?? null;
      const { raw = "", value: readBack = null } = decoded[i] ?? {};
      const stored = field.number?.kind === "integer" ? readStored(field, image) : null;
      const counted = stored !== null && typeof value === "number" && typeof readBack === "number";
      return {
        name: field.name,
        path: pointers.get(field.name.replace(/[[.].*$/, "")) ?? "",
        value: field.type === "bytes" && typeof value === "string" ? value.toLowerCase() : value,
        unit: field.unit,
        source: field.source,
        stored,
        raw,
        readBack,
        roundingSteps: counted ? (value - readBack) / field.scale : null,
      };
    });
    return { serial: sources.device.serial, hex: toHex(image), rows };
  } catch (error) {
    if (error instanceof AppError) return { refusal: error.message };
    throw error;
  }
}

function withGiven(sources: ImageSources, { serial, lot, coefficients }: GivenDevice): ImageSources {
  return {
    ...sources,
    device: { serial: serial || sources.device.serial },
    lot: { code: lot || sources.lot.code },
    coefficients: { ...sources.coefficients, ...coefficients },
  };
}
