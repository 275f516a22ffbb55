import type { StoredBytes } from "@/lib/services/stored-bytes";
import { allowsRange, namesTag, readRange } from "./byte-range";
import { streamOf } from "./stream";

/**
 * Answers a GET for exact bytes: entity tag, `Repr-Digest` (RFC 9530), one range (206, 416), `If-Range`, `If-None-Match` (304).
 * Nothing on the way may transform them. They are sent as they are read, at the pace of the client.
 * @throws AppError `request.range_invalid`
 */
export function bytesResponse(headers: Headers, bytes: StoredBytes, extra: Record<string, string> = {}): Response {
  const tag = `"${bytes.sha256}"`;
  const common: Record<string, string> = {
    ...extra,
    etag: tag,
    "cache-control": "private, no-cache, no-transform",
    "accept-ranges": "bytes",
    "repr-digest": `sha-256=:${Buffer.from(bytes.sha256, "hex").toString("base64")}:`,
  };
  if (namesTag(headers.get("if-none-match"), tag)) return new Response(null, { status: 304, headers: common });
  common["content-type"] = bytes.mediaType;
  common["content-disposition"] = `attachment; filename="${bytes.fileName}"`;
  common["x-content-type-options"] = "nosniff";
  const range = allowsRange(headers.get("if-range"), tag) ? readRange(headers.get("range"), bytes.length) : null;
  if (range === null) {
    Object.assign(common, lengthHeaders(bytes.length));
    const body = bytes.length === 0 ? null : streamOf(bytes.read({ first: 0, last: bytes.length - 1 }));
    return new Response(body, { status: 200, headers: common });
  }
  Object.assign(common, lengthHeaders(range.last - range.first + 1));
  common["content-range"] = `bytes ${range.first}-${range.last}/${bytes.length}`;
  return new Response(streamOf(bytes.read(range)), { status: 206, headers: common });
}

/** The second one gets through Next, and becomes the first again: see lib/commands/tell-length.mjs. */
const lengthHeaders = (bytes: number) => ({ "content-length": String(bytes), "x-body-length": String(bytes) });
