import { generateKeyPairSync } from "node:crypto";
import { hexPath } from "@/builders/bundle/bundle";
import { imageLine } from "@/builders/bundle/images-jsonl";
import { buildManifest, documentDigest, type Manifest, manifestBytes } from "@/builders/bundle/manifest";
import { keyIdOf, publicKeyPem, type ReleaseRecord, releaseBytes, signRelease } from "@/builders/bundle/release";
import { sha256Hex } from "@/builders/bundle/sha256";
import type { CompiledLayout } from "@/builders/codec/compile-layout";
import { writeImageHex } from "@/builders/codec/files/hex-image";
import { type DecodedField, decodeImage, encodeImage } from "@/builders/codec/image";
import type { ImageSources } from "@/builders/codec/sources";
import type { LayoutDocument } from "@/schemas/documents/layout";
import { type PackageContent, packageSums, type ReleaseFiles } from "@/tests/reference/bundle/bundle-files";
import { readGolden } from "@/tests/reference/codec/golden";

/** A device as it is packed; what doesn't belong together makes a bundle that lies. */
export interface PackedDevice {
  serial: string;
  /** Length of the image. */
  bytes: number;
  /** Of the image. */
  sha256: string;
  hex: string;
  fields: DecodedField[];
}

/** The golden lot packed, with invented ids. */
export function examplePackage(): { content: PackageContent; manifest: Manifest } {
  const { layout, compiled, sources } = readGolden(".", "MW20-2609");
  return packageOf(layout, packDevices(compiled, sources));
}

/** The devices of a layout, as a build makes them. */
export function packDevices(compiled: CompiledLayout, sources: readonly ImageSources[]): PackedDevice[] {
  return sources.map((one) => {
    const image = encodeImage(compiled, one);
    return {
      serial: one.device.serial,
      bytes: image.length,
      sha256: sha256Hex(image),
      hex: writeImageHex(compiled, image),
      fields: decodeImage(compiled, image),
    };
  });
}

/** A package of devices, its digests of files made from what they are. */
export function packageOf(
  layout: LayoutDocument,
  devices: readonly PackedDevice[],
): { content: PackageContent; manifest: Manifest } {
  const lines = devices.map(({ serial, sha256, fields }) => imageLine({ serial, derivation: "d1", sha256, fields }));
  const values = new TextEncoder().encode(lines.join(""));
  const images = devices.map(({ serial, bytes, sha256, hex }) => ({
    serial,
    hardwareId: null,
    bytes,
    sha256,
    hex: { path: hexPath(serial), sha256: sha256Hex(hex) },
  }));
  const manifest = buildManifest({
    lot: "MW20-2609",
    family: { code: "MW-20", revision: 1, sha256: "a".repeat(64) },
    version: "1.0.0",
    firmware: "2.3.0",
    layout: { version: layout.version, sha256: documentDigest(layout) },
    provenRange: [8.06, 41.9],
    derivations: [{ id: "d1", sha256: "b".repeat(64), method: "pooled-gain", order: 1, runs: [] }],
    images: images.reverse(),
    values: { path: "images.jsonl", sha256: sha256Hex(values) },
  });
  const hexes = new Map(devices.map(({ serial, hex }) => [serial, hex]));
  return { content: { manifest: manifestBytes(manifest), values, hexes }, manifest };
}

export const signingKey = generateKeyPairSync("ed25519").privateKey;

/** A release of the package, signed by {@link signingKey} unless another is given. */
export function exampleRelease(content: PackageContent, manifest: Manifest, key = signingKey): ReleaseFiles {
  const record: ReleaseRecord = {
    format: "trimwright/release@1",
    lot: manifest.lot,
    version: manifest.version,
    package: sha256Hex(manifestBytes(manifest)),
    sums: sha256Hex(packageSums(content)),
    reviewDigest: "c".repeat(64),
    sequence: 1,
    kind: "release",
    reason: null,
    releasedAt: "2026-03-09T15:40:00.000Z",
    approvals: [{ name: "Rita Okafor", role: "reviewer", meaning: "approved", at: "2026-03-09T15:40:00.000Z" }],
    coefficientApprovals: [],
    waivers: [],
    exclusions: [],
    acknowledgements: [],
    equipment: [],
    ledgerHead: "d".repeat(64),
    keyId: keyIdOf(key),
  };
  const release = releaseBytes(record);
  return { release, signature: signRelease(release, key), publicKeyPem: publicKeyPem(key) };
}
