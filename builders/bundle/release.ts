import { createPrivateKey, createPublicKey, type KeyObject, sign, verify } from "node:crypto";
import { sha256Hex } from "@/builders/bundle/sha256";
import { canonicalJson } from "@/lib/domain/canonical-json";
import { AppError } from "@/lib/errors";

/** What is signed when a package goes live (contract, section 5). */
export interface ReleaseRecord {
  format: "trimwright/release@1";
  lot: string;
  version: string;
  /** Package digest: SHA-256 of `manifest.json`. */
  package: string;
  /** SHA-256 of `SHA256SUMS`. */
  sums: string;
  reviewDigest: string;
  /** Rises by one for its lot at every change of what is live. */
  sequence: number;
  kind: "release" | "reinstatement";
  reason: string | null;
  /** RFC 3339, UTC, milliseconds. */
  releasedAt: string;
  approvals: { name: string; role: string; meaning: string; at: string }[];
  /** `devices` is null where all of a derivation were approved at once. */
  coefficientApprovals: {
    derivation: string;
    name: string;
    role: string;
    meaning: string;
    at: string;
    devices: number | null;
  }[];
  waivers: { check: string; name: string; reason: string; at: string }[];
  exclusions: { derivation: string; serial: string; reason: string; name: string }[];
  acknowledgements: {
    derivation: string;
    finding: string;
    serial: string | null;
    name: string;
    reason: string;
    at: string;
  }[];
  equipment: {
    run: string;
    code: string;
    kind: string;
    certificate: string;
    calibratedUntil: string;
    uncertainty: number;
  }[];
  /** Hash of the ledger's newest event. */
  ledgerHead: string;
  keyId: string;
}

/** `release.json`, RFC 8785 in UTF-8. */
export function releaseBytes(release: ReleaseRecord): Uint8Array {
  return new TextEncoder().encode(canonicalJson(release));
}

/**
 * 64 raw bytes, Ed25519 (RFC 8032) over the bytes of `release.json`.
 * @param privateKey Ed25519 as PKCS #8 PEM or a key object.
 * @throws AppError `release.key_not_ed25519`
 */
export function signRelease(bytes: Uint8Array, privateKey: string | KeyObject): Uint8Array {
  const key = typeof privateKey === "string" ? createPrivateKey(privateKey) : privateKey;
  assertEd25519(key);
  return new Uint8Array(sign(null, bytes, key));
}

/** True where the signature is the key's over these bytes. @throws AppError `release.key_not_ed25519` */
export function isReleaseSignature(bytes: Uint8Array, signature: Uint8Array, publicKey: string | KeyObject): boolean {
  const key = publicKeyOf(publicKey);
  return signature.length === 64 && verify(null, bytes, key, signature);
}

/** First 16 hex digits of the SHA-256 of the key's SPKI DER. @throws AppError `release.key_not_ed25519` */
export function keyIdOf(publicKey: string | KeyObject): string {
  return sha256Hex(publicKeyOf(publicKey).export({ type: "spki", format: "der" })).slice(0, 16);
}

/** `signing-key.pem`: SPKI PEM of the public key. @throws AppError `release.key_not_ed25519` */
export function publicKeyPem(key: string | KeyObject): string {
  return publicKeyOf(key).export({ type: "spki", format: "pem" }) as string;
}

/** The public key of a PEM (of either kind) or key object. */
function publicKeyOf(key: string | KeyObject): KeyObject {
  const known = typeof key === "string" || key.type === "private" ? readPublicKey(key) : key;
  assertEd25519(known);
  return known;
}

function readPublicKey(key: string | KeyObject): KeyObject {
  try {
    return createPublicKey(key as string);
  } catch (cause) {
    throw new AppError("release.key_malformed", { message: "The signing key cannot be read" }, { cause });
  }
}

function assertEd25519(key: KeyObject): void {
  if (key.asymmetricKeyType === "ed25519") return;
  throw new AppError("release.key_not_ed25519", { type: key.asymmetricKeyType ?? null });
}
