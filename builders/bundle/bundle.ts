import type { ReleaseRecord } from "@/builders/bundle/release";
import { sha256Hex } from "@/builders/bundle/sha256";
import { sumsTextOf } from "@/builders/bundle/sums";
import { notReleasedText, previewVerifyText, verifyText } from "@/builders/bundle/verify-text";
import { AppError } from "@/lib/errors";

/** Devices that a lot's bundle can hold (contract, section 5). */
export const BUNDLE_DEVICES_MAX = 60_000;

/** The bytes of a built package, as they are stored. */
export interface PackageContent {
  /** `manifest.json`. */
  manifest: Uint8Array;
  /** `images.jsonl`. */
  values: Uint8Array;
  /** Intel HEX by serial. */
  hexes: ReadonlyMap<string, string>;
}

/** The three files that a release adds. */
export interface ReleaseFiles {
  /** `release.json`, exactly as signed; see {@link ReleaseRecord}. */
  release: Uint8Array;
  /** `release.sig`, 64 bytes. */
  signature: Uint8Array;
  /** `signing-key.pem`. */
  publicKeyPem: string;
}

/** Path of a device's HEX file in the bundle. */
export function hexPath(serial: string): string {
  return `images/${serial}.hex`;
}

/** @throws AppError `bundle.too_many_devices` {devices, limit} */
export function assertDevicesFit(devices: number): void {
  if (devices <= BUNDLE_DEVICES_MAX) return;
  const message = `A bundle holds ${BUNDLE_DEVICES_MAX} devices, not ${devices}: split the lot`;
  throw new AppError("bundle.too_many_devices", { devices, limit: BUNDLE_DEVICES_MAX, message });
}

/** `SHA256SUMS` of a package: the images, their values and the manifest. Its SHA-256 is what a release names as sums. */
export function packageSums(content: PackageContent): string {
  const digests = new Map<string, string>();
  for (const [serial, hex] of content.hexes) digests.set(hexPath(serial), sha256Hex(hex));
  digests.set("images.jsonl", sha256Hex(content.values));
  digests.set("manifest.json", sha256Hex(content.manifest));
  return sumsTextOf(digests);
}

/** Files of a released bundle by path; {@link zipPieces} makes them one. @throws AppError `bundle.too_many_devices` */
export function releasedFiles(content: PackageContent, release: ReleaseFiles): Map<string, Uint8Array | string> {
  return contentFiles(content)
    .set("VERIFY.txt", verifyText())
    .set("release.json", release.release)
    .set("release.sig", release.signature)
    .set("signing-key.pem", release.publicKeyPem);
}

/** Files of a preview by path: `NOT-RELEASED.txt` stands for the three of a release. @throws AppError `bundle.too_many_devices` */
export function previewFiles(
  content: PackageContent,
  facts: { lot: string; version: string },
): Map<string, Uint8Array | string> {
  return contentFiles(content).set("VERIFY.txt", previewVerifyText()).set("NOT-RELEASED.txt", notReleasedText(facts));
}

function contentFiles(content: PackageContent): Map<string, Uint8Array | string> {
  assertDevicesFit(content.hexes.size);
  const files = new Map<string, Uint8Array | string>([
    ["SHA256SUMS", packageSums(content)],
    ["images.jsonl", content.values],
    ["manifest.json", content.manifest],
  ]);
  for (const [serial, hex] of content.hexes) files.set(hexPath(serial), hex);
  return files;
}
