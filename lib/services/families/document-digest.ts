import { sha256Hex } from "@/builders/bundle/sha256";
import { canonicalJson } from "@/lib/domain/canonical-json";

/** SHA-256 of a document's RFC 8785 form: what a family revision or a layout is known by. */
export function documentDigest(document: unknown): Buffer {
  return Buffer.from(sha256Hex(canonicalJson(document)), "hex");
}
