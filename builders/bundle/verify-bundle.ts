import { type DescribedImage, ImageOfHex } from "@/builders/bundle/image-of-hex";
import { type ImageValues, readImagesJsonl } from "@/builders/bundle/images-jsonl";
import type { Manifest, ManifestImage } from "@/builders/bundle/manifest";
import { readZip } from "@/builders/bundle/read-zip";
import { refuse } from "@/builders/bundle/refuse";
import { isReleaseSignature, keyIdOf, type ReleaseRecord } from "@/builders/bundle/release";
import { sha256Hex } from "@/builders/bundle/sha256";
import { readSums } from "@/builders/bundle/sums";
import { chooseSamples, MOST_BYTES, type RawField } from "@/builders/bundle/values-image";
import { previewVerifyText, UNLISTED_FILES, UNLISTED_PREVIEW_FILES, verifyText } from "@/builders/bundle/verify-text";
import { readIntelHex } from "@/builders/codec/files/intel-hex-read";
import { AppError } from "@/lib/errors";

export interface VerifyStep {
  name: "container" | "release" | "files" | "sums" | "manifest" | "images" | "list" | "signature" | "key";
  ok: boolean;
  /** What was found, in words. */
  message: string;
}

export interface VerifyResult {
  /** True where every step holds: released, complete, undamaged, signed by a key that is trusted (where keys are given). */
  ok: boolean;
  steps: VerifyStep[];
}

export interface VerifyOptions {
  /** Keys as the installation lists them, or their ids alone; without any, the key id has to be compared by a person. */
  trustedKeys?: readonly { keyId: string; pem?: string }[];
}

/** Verifies a whole bundle offline, every step told in words; a step that fails doesn't hide the others. Never throws for what is in the bundle. */
export function verifyBundle(bytes: Uint8Array, options: VerifyOptions = {}): VerifyResult {
  const opened: { files?: Map<string, Uint8Array> } = {};
  const container = attempt("container", () => {
    opened.files = readZip(bytes);
    return `A plain zip of ${opened.files.size} files`;
  });
  return opened.files ? withSteps([container, ...verifySteps(opened.files, options)]) : withSteps([container]);
}

/** As {@link verifyBundle}, for a bundle that was unpacked: content by path, relative to its folder. */
export function verifyBundleFiles(files: ReadonlyMap<string, Uint8Array>, options: VerifyOptions = {}): VerifyResult {
  return withSteps(verifySteps(files, options));
}

function withSteps(steps: VerifyStep[]): VerifyResult {
  return { ok: steps.every((step) => step.ok), steps };
}

function verifySteps(files: ReadonlyMap<string, Uint8Array>, options: VerifyOptions): VerifyStep[] {
  const bundle = new OpenBundle(files);
  return [
    attempt("release", () => bundle.checkReleased()),
    attempt("files", () => bundle.checkListing()),
    attempt("sums", () => bundle.checkSums()),
    attempt("manifest", () => bundle.checkManifest()),
    attempt("images", () => bundle.checkImages()),
    attempt("list", () => bundle.checkReleaseNamesList()),
    attempt("signature", () => bundle.checkSignature()),
    attempt("key", () => bundle.checkKey(options.trustedKeys)),
  ];
}

function attempt(name: VerifyStep["name"], check: () => string): VerifyStep {
  try {
    return { name, ok: true, message: check() };
  } catch (error) {
    if (error instanceof AppError) return { name, ok: false, message: error.message };
    throw error;
  }
}

/** The files of a bundle with what is read from them; every check returns what it found or throws an AppError. */
class OpenBundle {
  readonly #files: ReadonlyMap<string, Uint8Array>;

  constructor(files: ReadonlyMap<string, Uint8Array>) {
    this.#files = files;
  }

  checkReleased(): string {
    if (this.#files.has("NOT-RELEASED.txt")) refuse("This is a preview: the package is not released");
    const release = this.#release();
    return `Package ${release.version} of lot ${release.lot}, sequence ${release.sequence}, ${release.kind} of ${release.releasedAt}`;
  }

  checkListing(): string {
    const listed = readSums(this.#text("SHA256SUMS"));
    const apart: readonly string[] = this.#files.has("NOT-RELEASED.txt") ? UNLISTED_PREVIEW_FILES : UNLISTED_FILES;
    const missing = [...listed.keys(), ...apart].filter((path) => !this.#files.has(path));
    if (missing.length > 0) refuse(countFiles(missing, "missing"));
    const stray = [...this.#files.keys()].filter((path) => !listed.has(path) && !apart.includes(path));
    if (stray.length > 0) refuse(countFiles(stray, "not listed"));
    const all = `All ${listed.size} listed files are there and no others`;
    if ([verifyText(), previewVerifyText()].includes(this.#text("VERIFY.txt"))) return all;
    // No refusal: a release from before keeps the text of its day.
    return `${all}; VERIFY.txt is not the text that this program knows, and nothing holds it: run no command of it unread`;
  }

  checkSums(): string {
    const listed = readSums(this.#text("SHA256SUMS"));
    const wrong = [...listed].filter(([path, digest]) => {
      const content = this.#files.get(path);
      return content !== undefined && sha256Hex(content) !== digest;
    });
    const paths = wrong.map(([path]) => path);
    if (wrong.length > 0) refuse(countFiles(paths, "not as SHA256SUMS lists"));
    return `All ${listed.size} files have the digest that SHA256SUMS lists`;
  }

  checkManifest(): string {
    const release = this.#release();
    const digest = sha256Hex(this.#file("manifest.json"));
    if (release.package !== digest)
      refuse(`release.json is about package ${release.package}, not about this manifest.json`);
    const { lot, version } = this.#manifest();
    if (lot !== release.lot || version !== release.version)
      refuse("release.json names another lot or version than manifest.json");
    return `The package digest is ${digest}`;
  }

  checkImages(): string {
    const { images } = this.#manifest();
    const values = this.#values();
    for (const { serial, sha256, hex } of images) {
      if (sha256Hex(this.#file(hex.path)) !== hex.sha256) refuse(`${hex.path} is not the manifest's`);
      if (values.get(serial)?.sha256 !== sha256) refuse(`The values of ${serial} are of another image`);
    }
    const listed = [...readSums(this.#text("SHA256SUMS")).keys()].filter((path) => path.startsWith("images/"));
    const known = new Set(images.map((image) => image.hex.path));
    if (values.size !== known.size || listed.some((path) => !known.has(path)))
      refuse("There are images that the manifest does not name");
    return this.#checkHexes(images, values);
  }

  /** Every HEX holds the image whose digest the manifest names, and the values are what it holds. */
  #checkHexes(images: readonly ManifestImage[], values: ReadonlyMap<string, ImageValues>): string {
    const fieldsOf = ({ serial }: ManifestImage) => values.get(serial)?.fields ?? [];
    const chosen = chooseSamples(images.map((image) => ({ fields: fieldsOf(image) })));
    const describe = (image: ManifestImage) => this.#describe(image, fieldsOf(image));
    const [first, ...more] = chosen.map((i) => describe(images[i] as ManifestImage));
    if (!first) return "The manifest names no image";
    const hexes = new ImageOfHex([first, ...more]);
    for (const image of images) hexes.assertHolds(describe(image));
    if (hexes.isPlaced)
      return `${images.length} images: each HEX holds the image whose digest the manifest names, and its values`;
    return `${images.length} images stand in the manifest with their values; where the bytes of a HEX lie in the image could not be told, so the digest of ${images.length} images was computed from their values alone, and the bytes of each HEX were only counted`;
  }

  #describe({ serial, bytes, sha256, hex }: ManifestImage, fields: readonly RawField[]): DescribedImage {
    if (!Number.isInteger(bytes) || bytes < 1 || bytes > MOST_BYTES)
      refuse(`The image of ${serial} has ${bytes} bytes; a layout has 1 to ${MOST_BYTES}`);
    const { segments } = readIntelHex(this.#text(hex.path));
    return { serial, path: hex.path, bytes, sha256, fields, segments };
  }

  checkReleaseNamesList(): string {
    const digest = sha256Hex(this.#file("SHA256SUMS"));
    if (this.#release().sums !== digest) refuse("release.json is about another SHA256SUMS than this one");
    return "release.json is about this SHA256SUMS";
  }

  checkSignature(): string {
    this.#assertReleased();
    const pem = this.#text("signing-key.pem");
    const bytes = this.#file("release.json");
    if (!isReleaseSignature(bytes, this.#file("release.sig"), pem))
      refuse("The signature is not over this release.json by this key");
    return "The signature over release.json holds";
  }

  checkKey(trusted: VerifyOptions["trustedKeys"]): string {
    this.#assertReleased();
    const keyId = keyIdOf(this.#text("signing-key.pem"));
    if (this.#release().keyId !== keyId)
      refuse(`release.json names the key ${this.#release().keyId}, the bundle holds ${keyId}`);
    if (!trusted) return `The key is ${keyId}: compare it with the installation's list of signing keys`;
    // The id is recomputed, so that a list with a wrong id for a key doesn't lend it trust.
    if (!trusted.some((key) => key.keyId === keyId && (key.pem === undefined || keyIdOf(key.pem) === keyId)))
      refuse(`The key ${keyId} is not one of the trusted keys`);
    return `The key ${keyId} is one of the trusted keys`;
  }

  #file(path: string): Uint8Array {
    return this.#files.get(path) ?? refuse(`${path} is missing`);
  }

  #text(path: string): string {
    return new TextDecoder().decode(this.#file(path));
  }

  #values(): Map<string, ImageValues> {
    const { path, sha256 } = this.#manifest().values;
    if (sha256Hex(this.#file(path)) !== sha256) refuse(`${path} is not the manifest's`);
    return new Map(readImagesJsonl(this.#text(path)).map((one) => [one.serial, one]));
  }

  #assertReleased(): void {
    if (this.#files.has("NOT-RELEASED.txt")) refuse("This is a preview: nothing in it is signed");
  }

  #release(): ReleaseRecord {
    this.#assertReleased();
    const release = this.#json("release.json", "trimwright/release@1") as Partial<ReleaseRecord>;
    const texts = [release.lot, release.version, release.package, release.sums, release.keyId];
    if (!texts.every((text) => typeof text === "string")) refuse("release.json lacks what a release says");
    return release as ReleaseRecord;
  }

  #manifest(): Manifest {
    const manifest = this.#json("manifest.json", "trimwright/package@1") as Partial<Manifest>;
    const images =
      Array.isArray(manifest.images) && manifest.images.every((image) => typeof image?.hex?.path === "string");
    if (!images || typeof manifest.values?.path !== "string") refuse("manifest.json lacks what a manifest says");
    return manifest as Manifest;
  }

  #json(path: string, format: string): object {
    const value = parseJson(this.#text(path), path);
    if (typeof value !== "object" || value === null || !("format" in value) || value.format !== format) {
      refuse(`${path} is not of the format ${format}`);
    }
    return value;
  }
}

/** "1 file is missing: a" and "3 files are missing, a among them". */
function countFiles(paths: readonly string[], what: string): string {
  return paths.length === 1
    ? `1 file is ${what}: ${paths[0]}`
    : `${paths.length} files are ${what}, ${paths[0]} among them`;
}

function parseJson(text: string, path: string): unknown {
  try {
    return JSON.parse(text);
  } catch (cause) {
    throw new AppError("bundle.not_verified", { message: `${path} is not JSON` }, { cause });
  }
}
