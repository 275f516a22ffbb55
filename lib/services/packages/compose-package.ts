import semver from "semver";
import { assertDevicesFit } from "@/builders/bundle/bundle";
import { ContentWriter, type WrittenContent } from "@/builders/bundle/content-writer";
import { byCodeUnits, type Manifest } from "@/builders/bundle/manifest";
import { type CompiledLayout, compileLayout } from "@/builders/codec/compile-layout";
import { type DecodedField, decodeImage, encodeImageInto } from "@/builders/codec/image";
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

/** The images of some devices, one after the other, in as little memory as their bytes take. */
export interface ImagePart {
  devices: readonly PackedDevice[];
  bytes: Buffer;
  /** 32 bytes a device. */
  sha256: Buffer;
  hexSha256: Buffer;
}

export interface ComposedPackage extends WrittenContent {
  /** Derivations whose sets are packed, by id. */
  derivations: DerivationRow[];
  provenRange: [number, number] | null;
}

export interface ComposeOptions {
  /** Looks at every image; also reads what stands beside the coefficients, and decodes. */
  onImage?: (image: ComposedImage) => void;
  /** Before each part of the devices is read. */
  beforePart?: (devices: readonly PackedDevice[]) => Promise<void>;
  /** Takes each part of the images; they are not kept here. */
  onPart?: (part: ImagePart) => void | Promise<void>;
}

/** Devices read and encoded at a time: bounds memory and how long the event loop is held. */
export const PART_DEVICES = 250;

const DIGEST_BYTES = 32;

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
 * @param parts devices by serial in UTF-16 code units.
 * @throws AppError `bundle.too_many_devices`, `package.set_missing` {serial}, and as {@link encodeImageInto} with {serial, field}
 */
export async function composePackage(
  db: Db,
  inputs: PackageInputs,
  parts: Iterable<readonly PackedDevice[]> | AsyncIterable<readonly PackedDevice[]>,
  options: ComposeOptions = {},
): Promise<ComposedPackage> {
  const writer = new ContentWriter(inputs.layout, { keepValues: false });
  const used = new Set<string>();
  let count = 0;
  for await (const devices of parts) {
    count += devices.length;
    assertDevicesFit(count);
    await options.beforePart?.(devices);
    const ids = devices.map((one) => one.coefficientSetId);
    const sets = await listSetsById(db, ids, { withDetail: options.onImage !== undefined });
    for (const set of sets.values()) used.add(set.derivationId);
    const part = composePart(inputs, writer, { devices, sets }, options.onImage);
    await options.onPart?.(part);
  }
  return seal(db, inputs, writer, [...used].sort(byCodeUnits));
}

function composePart(
  inputs: PackageInputs,
  writer: ContentWriter,
  { devices, sets }: { devices: readonly PackedDevice[]; sets: ReadonlyMap<string, SetForImage> },
  onImage: ComposeOptions["onImage"],
): ImagePart {
  const { layout } = inputs;
  const part = {
    devices,
    bytes: Buffer.allocUnsafe(devices.length * layout.bytes),
    sha256: Buffer.allocUnsafe(devices.length * DIGEST_BYTES),
    hexSha256: Buffer.allocUnsafe(devices.length * DIGEST_BYTES),
  };
  devices.forEach((device, i) => {
    const { serial, hardwareId } = device;
    const set = sets.get(device.coefficientSetId);
    if (!set?.coefficients) {
      throw new AppError("package.set_missing", { serial, message: `${serial} has no coefficients to pack.` });
    }
    const sources = sourcesOf(inputs, serial, set.coefficients);
    const bytes = part.bytes.subarray(i * layout.bytes, (i + 1) * layout.bytes);
    encodeImageInto(bytes, layout, sources);
    const { sha256, hexSha256 } = writer.add({ serial, hardwareId, derivation: set.derivationId, image: bytes });
    part.sha256.write(sha256, i * DIGEST_BYTES, "hex");
    part.hexSha256.write(hexSha256, i * DIGEST_BYTES, "hex");
    onImage?.({ device, set, sources, bytes, hex: writer.lastHex(), decoded: decodeImage(layout, bytes) });
  });
  return part;
}

/** The rows of a part's images; their bytes are views into it. */
export function imageRowsOf({ devices, bytes, sha256, hexSha256 }: ImagePart): NewImage[] {
  const size = bytes.length / devices.length;
  const digest = (all: Buffer, i: number) => all.subarray(i * DIGEST_BYTES, (i + 1) * DIGEST_BYTES);
  return devices.map(({ deviceId, serial, coefficientSetId, hardwareId }, i) => ({
    deviceId,
    serial,
    coefficientSetId,
    hardwareId,
    bytes: bytes.subarray(i * size, (i + 1) * size),
    sha256: digest(sha256, i),
    hexSha256: digest(hexSha256, i),
  }));
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

/** Manifest, digest and list of sums over the images. */
async function seal(
  db: Db,
  { pkg, layoutSha256, revision }: PackageInputs,
  writer: ContentWriter,
  derivationIds: readonly string[],
): Promise<ComposedPackage> {
  const derivations: DerivationRow[] = [];
  for (const id of derivationIds) derivations.push(await getDerivation(db, id));
  const provenRange = commonRange(derivations);
  const content = writer.finish({
    lot: pkg.lotCode,
    family: { code: pkg.familyCode, revision: revision.number, sha256: revision.sha256.toString("hex") },
    version: pkg.version,
    firmware: pkg.firmware,
    layout: { version: pkg.layoutVersion, sha256: layoutSha256 },
    provenRange,
    derivations: await manifestDerivations(db, derivations),
  });
  return { ...content, derivations, provenRange };
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
