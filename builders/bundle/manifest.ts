import { sha256Hex } from "@/builders/bundle/sha256";
import { canonicalJson } from "@/lib/domain/canonical-json";

export type RunPurpose = "sample" | "zero" | "span" | "verification" | "proof";

export interface ManifestRun {
  id: string;
  purpose: RunPurpose;
  /** Of the bytes as uploaded. */
  sha256: string;
}

export interface ManifestDerivation {
  id: string;
  /** See {@link derivationDigest}. */
  sha256: string;
  method: "individual" | "pooled-gain" | "import";
  order: 1 | 2;
  runs: ManifestRun[];
}

export interface ManifestImage {
  serial: string;
  hardwareId: string | null;
  bytes: number;
  /** Of the image's bytes, kept ranges taken as fill. */
  sha256: string;
  hex: { path: string; sha256: string };
}

/** What a package consists of, by digest (contract, section 5). */
export interface Manifest {
  format: "trimwright/package@1";
  lot: string;
  family: { code: string; revision: number; sha256: string };
  version: string;
  /** The lot's. */
  firmware: string;
  layout: { version: string; sha256: string };
  /** °C; null where no derivation proves one (imported coefficients only). */
  provenRange: [number, number] | null;
  derivations: ManifestDerivation[];
  images: ManifestImage[];
  values: { path: string; sha256: string };
}

const encoder = new TextEncoder();

/** Orders texts by UTF-16 code units, the same on every machine and in every language. */
export function byCodeUnits(a: string, b: string): number {
  return a < b ? -1 : a > b ? 1 : 0;
}

/** The manifest with its lists in a fixed order: derivations by id, runs by digest and id, images by serial. */
export function buildManifest(content: Omit<Manifest, "format">): Manifest {
  const derivations = content.derivations.map((one) => ({ ...one, runs: [...one.runs].sort(byDigestThenId) }));
  return {
    ...content,
    format: "trimwright/package@1",
    derivations: derivations.sort((a, b) => byCodeUnits(a.id, b.id)),
    images: [...content.images].sort((a, b) => byCodeUnits(a.serial, b.serial)),
  };
}

function byDigestThenId(a: ManifestRun, b: ManifestRun): number {
  return byCodeUnits(a.sha256, b.sha256) || byCodeUnits(a.id, b.id);
}

/** `manifest.json`: the RFC 8785 form in UTF-8. Its SHA-256 is the package digest. */
export function manifestBytes(manifest: Manifest): Uint8Array {
  return encoder.encode(canonicalJson(manifest));
}

/**
 * As {@link manifestBytes} of {@link buildManifest}, from the canonical text of the images, joined by commas and by serial, in
 * pieces: a lot of 60,000 devices is never held as one object or string.
 */
export function manifestBytesAround(
  content: Omit<Manifest, "format" | "images">,
  images: readonly Uint8Array[],
): Buffer {
  const around = canonicalJson(buildManifest({ ...content, images: [] }));
  // Quotes within texts are escaped, so that this stands in the manifest once.
  const at = around.indexOf(NO_IMAGES) + NO_IMAGES.length - 1;
  return Buffer.concat([encoder.encode(around.slice(0, at)), ...images, encoder.encode(around.slice(at))]);
}

const NO_IMAGES = '"images":[]';

/** What a derivation was computed from; the digest tells whether two were computed alike. */
export interface DerivationInputs {
  method: ManifestDerivation["method"];
  order: 1 | 2;
  family: { code: string; revision: number; sha256: string };
  runs: readonly { purpose: RunPurpose; sha256: string }[];
  exclude: readonly { serial: string; reason: string }[];
  /** Version of the compensation code. */
  engine: string;
}

/** SHA-256 of the RFC 8785 form of the inputs, runs by digest and exclusions by serial (contract, section 5). */
export function derivationDigest(inputs: DerivationInputs): string {
  const { method, order, engine } = inputs;
  const { code, revision, sha256 } = inputs.family;
  const runs = inputs.runs.map((run) => ({ purpose: run.purpose, sha256: run.sha256 }));
  const exclude = inputs.exclude.map(({ serial, reason }) => ({ serial, reason }));
  runs.sort((a, b) => byCodeUnits(a.sha256, b.sha256) || byCodeUnits(a.purpose, b.purpose));
  exclude.sort((a, b) => byCodeUnits(a.serial, b.serial));
  return sha256Hex(canonicalJson({ method, order, family: { code, revision, sha256 }, runs, exclude, engine }));
}

/** SHA-256 of the RFC 8785 form of a document (layout, family revision), lower-case hex. */
export function documentDigest(document: unknown): string {
  return sha256Hex(canonicalJson(document));
}
