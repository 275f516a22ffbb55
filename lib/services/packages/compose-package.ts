import semver from "semver";
import { assertDevicesFit, hexPath } from "@/builders/bundle/bundle";
import { imageLine } from "@/builders/bundle/images-jsonl";
import {
  buildManifest,
  byCodeUnits,
  type Manifest,
  type ManifestImage,
  manifestBytes,
} from "@/builders/bundle/manifest";
import { sha256Hex } from "@/builders/bundle/sha256";
import { sumsTextOf } from "@/builders/bundle/sums";
import { type CompiledLayout, compileLayout } from "@/builders/codec/compile-layout";
import { type DecodedField, decodeImage, encodeImage, imageDigestBytes } from "@/builders/codec/image";
import { writeIntelHex } from "@/builders/codec/intel-hex-write";
import type { ImageSources } from "@/builders/codec/sources";
import type { Db } from "@/db/executor";
import { type DerivationRow, getDerivation, listDerivationRunIds } from "@/db/queries/derivations";
import { type FamilyRevisionRow, getFamilyRevision } from "@/db/queries/families";
import type { NewImage } from "@/db/queries/images";
import { getLayoutById } from "@/db/queries/layouts";
import { listSetsById, type SetForImage } from "@/db/queries/package-inputs";
import type { PackageRow } from "@/db/queries/packages";
import { listRunsById } from "@/db/queries/runs";
import { AppError } from "@/lib/errors";
import type { PackedDevice } from "./choose-sets";

/** What is fixed about a package before its devices are looked at. */
export interface PackageInputs {
  pkg: PackageRow;
  layout: CompiledLayout;
  layoutSha256: string;
  revision: FamilyRevisionRow;
}

/** One device as it was composed, for checks that look at every one. */
export interface ComposedImage {
  device: PackedDevice;
  set: SetForImage;
  sources: ImageSources;
  bytes: Uint8Array;
  hex: string;
  /** The bytes read again. */
  decoded: DecodedField[];
}

export interface ComposedPackage {
  images: NewImage[];
  /** `images.jsonl`. */
  values: Buffer;
  manifest: Manifest;
  /** `manifest.json`. */
  manifestBytes: Buffer;
  /** Package digest, lower-case hex. */
  digest: string;
  /** `SHA256SUMS`. */
  sums: Buffer;
  /** Derivations whose sets are packed, by id. */
  derivations: DerivationRow[];
}

export interface ComposeOptions {
  /** Also reads what stands beside the coefficients, for checks. */
  withDetail?: boolean;
  onImage?: (image: ComposedImage) => void;
  /** After every part of the devices: how many are done. */
  onProgress?: (done: number) => Promise<void>;
}

/** Devices read and encoded at a time: bounds memory and how long the event loop is held. */
const PART = 500;

/** @throws AppError `layout.invalid` */
export async function readPackageInputs(db: Db, pkg: PackageRow): Promise<PackageInputs> {
  const layout = await getLayoutById(db, pkg.layoutId);
  return {
    pkg,
    layout: compileLayout(layout.document),
    layoutSha256: layout.sha256.toString("hex"),
    revision: await getFamilyRevision(db, pkg.familyRevisionId),
  };
}

/**
 * The bytes of a package from its inputs: the same ones at every call, on any machine, years later. Builds and rebuilds
 * both come here; a build chooses the sets, a rebuild takes those that its image rows name.
 * @param devices in any order.
 * @throws AppError `bundle.too_many_devices`, `package.set_missing` {serial}, and as {@link encodeImage} with {serial, field}
 */
export async function composePackage(
  db: Db,
  inputs: PackageInputs,
  devices: readonly PackedDevice[],
  options: ComposeOptions = {},
): Promise<ComposedPackage> {
  assertDevicesFit(devices.length);
  const rising = [...devices].sort((a, b) => byCodeUnits(a.serial, b.serial));
  const images: NewImage[] = [];
  const values: Buffer[] = [];
  const used = new Set<string>();
  for (let from = 0; from < rising.length; from += PART) {
    const part = rising.slice(from, from + PART);
    const sets = await listSetsById(
      db,
      part.map((one) => one.coefficientSetId),
      { withDetail: options.withDetail ?? false },
    );
    let lines = "";
    for (const device of part) {
      const image = composeImage(inputs, device, sets.get(device.coefficientSetId));
      used.add(image.set.derivationId);
      options.onImage?.(image);
      const row = imageRowOf(inputs.layout, image);
      images.push(row);
      const { serial } = device;
      const sha256 = row.sha256.toString("hex");
      lines += imageLine({ serial, derivation: image.set.derivationId, sha256, fields: image.decoded });
    }
    values.push(Buffer.from(lines));
    await options.onProgress?.(from + part.length);
  }
  return seal(db, inputs, { images, values: Buffer.concat(values), derivationIds: [...used] });
}

function composeImage(inputs: PackageInputs, device: PackedDevice, set: SetForImage | undefined): ComposedImage {
  const { serial } = device;
  if (!set?.coefficients) {
    throw new AppError("package.set_missing", { serial, message: `${serial} has no coefficients to pack.` });
  }
  const { layout } = inputs;
  const sources = sourcesOf(inputs, serial, set.coefficients);
  const bytes = encodeImage(layout, sources);
  const hex = writeIntelHex(bytes, layout.baseAddress, layout.kept);
  return { device, set, sources, bytes, hex, decoded: decodeImage(layout, bytes) };
}

function sourcesOf(
  { pkg, layout, revision }: PackageInputs,
  serial: string,
  coefficients: ImageSources["coefficients"],
): ImageSources {
  const { version } = layout.document;
  const { referenceC, capacityKg, nominalMvV } = revision.document;
  return {
    device: { serial },
    lot: { code: pkg.lotCode },
    layout: { major: semver.major(version), minor: semver.minor(version), patch: semver.patch(version) },
    package: { major: pkg.versionMajor, minor: pkg.versionMinor, patch: pkg.versionPatch },
    coefficients,
    family: { referenceTemperature: referenceC, capacity: capacityKg, nominalOutput: nominalMvV },
  };
}

function imageRowOf(layout: CompiledLayout, { device, bytes, hex }: ComposedImage): NewImage {
  return {
    ...device,
    bytes: Buffer.from(bytes.buffer, bytes.byteOffset, bytes.byteLength),
    sha256: Buffer.from(sha256Hex(imageDigestBytes(layout, bytes)), "hex"),
    hexSha256: Buffer.from(sha256Hex(hex), "hex"),
  };
}

/** Manifest, digest and list of sums over the images. */
async function seal(
  db: Db,
  { pkg, layout, layoutSha256, revision }: PackageInputs,
  { images, values, derivationIds }: { images: NewImage[]; values: Buffer; derivationIds: string[] },
): Promise<ComposedPackage> {
  const derivations: DerivationRow[] = [];
  for (const id of derivationIds.sort(byCodeUnits)) derivations.push(await getDerivation(db, id));
  const manifest = buildManifest({
    lot: pkg.lotCode,
    family: { code: pkg.familyCode, revision: revision.number, sha256: revision.sha256.toString("hex") },
    version: pkg.version,
    firmware: pkg.firmware,
    layout: { version: pkg.layoutVersion, sha256: layoutSha256 },
    provenRange: commonRange(derivations),
    derivations: await manifestDerivations(db, derivations),
    images: images.map((image) => manifestImage(image, layout.bytes)),
    values: { path: "images.jsonl", sha256: sha256Hex(values) },
  });
  const bytes = Buffer.from(manifestBytes(manifest));
  const digest = sha256Hex(bytes);
  const sums = sumsTextOf(
    new Map([
      ...manifest.images.map(({ hex }): [string, string] => [hex.path, hex.sha256]),
      [manifest.values.path, manifest.values.sha256],
      ["manifest.json", digest],
    ]),
  );
  return { images, values, manifest, manifestBytes: bytes, digest, sums: Buffer.from(sums), derivations };
}

function manifestImage({ serial, hardwareId, sha256, hexSha256 }: NewImage, bytes: number): ManifestImage {
  const hex = { path: hexPath(serial), sha256: hexSha256.toString("hex") };
  return { serial, hardwareId, bytes, sha256: sha256.toString("hex"), hex };
}

async function manifestDerivations(db: Db, derivations: readonly DerivationRow[]): Promise<Manifest["derivations"]> {
  const listed: Manifest["derivations"] = [];
  for (const { id, sha256, method, order } of derivations) {
    const runs = await listRunsById(db, await listDerivationRunIds(db, id));
    listed.push({
      id,
      sha256: sha256.toString("hex"),
      method,
      order,
      runs: runs.map((run) => ({ id: run.id, purpose: run.purpose, sha256: run.sha256.toString("hex") })),
    });
  }
  return listed;
}

/** What all derivations prove that prove anything; null where none does or they have no temperature in common. */
function commonRange(derivations: readonly DerivationRow[]): [number, number] | null {
  const ranges = derivations.flatMap(({ provenLowC, provenHighC }) =>
    provenLowC === null || provenHighC === null ? [] : [[provenLowC, provenHighC] as const],
  );
  if (ranges.length === 0) return null;
  const low = Math.max(...ranges.map(([from]) => from));
  const high = Math.min(...ranges.map(([, to]) => to));
  return low <= high ? [low, high] : null;
}
