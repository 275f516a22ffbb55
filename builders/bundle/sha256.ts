import * as crypto from "node:crypto";
import { createHash } from "node:crypto";
import { canonicalJson } from "@/lib/domain/canonical-json";
import type { Steps } from "@/lib/domain/steps";

/** One-call hashing halves the cost for small inputs; older releases of Node.js 20 have only the object form. */
const oneCall = "hash" in crypto ? crypto.hash : undefined;

/** SHA-256 (FIPS 180-4) in lower-case hex; texts are taken as UTF-8. */
export function sha256Hex(data: Uint8Array | string): string {
  return oneCall ? oneCall("sha256", data, "hex") : createHash("sha256").update(data).digest("hex");
}

/** SHA-256 of a content that comes in pieces, in lower-case hex. */
export function sha256OfPieces(pieces: Iterable<Uint8Array>): string {
  const hash = createHash("sha256");
  for (const piece of pieces) hash.update(piece);
  return hash.digest("hex");
}

/** What is hashed in a step: about 2 ms. */
const STEP_BYTES = 1024 * 1024;

/** SHA-256 of a large content, 32 bytes. */
export function* sha256InSteps(data: Uint8Array): Steps<Buffer> {
  const hash = createHash("sha256");
  for (let from = 0; from < data.length; from += STEP_BYTES) {
    hash.update(data.subarray(from, from + STEP_BYTES));
    yield;
  }
  return hash.digest();
}

const ITEMS_A_STEP = 500;

/** SHA-256 of the RFC 8785 form of a long array of JSON values, in lower-case hex. */
export function* canonicalArraySha256(items: readonly unknown[]): Steps<string> {
  const hash = createHash("sha256").update("[");
  for (let from = 0; from < items.length; from += ITEMS_A_STEP) {
    const text = canonicalJson(items.slice(from, from + ITEMS_A_STEP)).slice(1, -1);
    hash.update(from === 0 ? text : `,${text}`);
    yield;
  }
  return hash.update("]").digest("hex");
}
