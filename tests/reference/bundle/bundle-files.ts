/** Whole bundles as files by path, for holding the product's pieces against. */
import { assertDevicesFit, hexPath } from "@/builders/bundle/bundle";
import { sha256Hex } from "@/builders/bundle/sha256";
import { sumsTextOf } from "@/builders/bundle/sums";
import { notReleasedText, previewVerifyText, verifyText } from "@/builders/bundle/verify-text";

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
  /** `release.json`, exactly as signed. */
  release: Uint8Array;
  /** `release.sig`, 64 bytes. */
  signature: Uint8Array;
  /** `signing-key.pem`. */
  publicKeyPem: string;
}

/** `SHA256SUMS` of a package: the images, their values and the manifest. Its SHA-256 is what a release names as sums. */
export function packageSums(content: PackageContent): string {
  const digests = new Map<string, string>();
  for (const [serial, hex] of content.hexes) digests.set(hexPath(serial), sha256Hex(hex));
  digests.set("images.jsonl", sha256Hex(content.values));
  digests.set("manifest.json", sha256Hex(content.manifest));
  return sumsTextOf([...digests].map(([path, digest]) => ({ path, digest })));
}

/** Files of a released bundle by path; `zipPieces` makes them one. @throws AppError `bundle.too_many_devices` */
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
