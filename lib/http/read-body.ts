import type { Steps } from "@/lib/domain/steps";
import { AppError } from "@/lib/errors";
import { inSlices } from "@/lib/services/in-slices";

/** JSON bodies are small: forms, decisions, layouts and up to 1,000 write records. */
export const JSON_MAX_BYTES = 4 * 1024 * 1024;

/**
 * The request's bytes, read as a stream and given up as soon as they pass the bound.
 * @throws AppError `request.too_large` {maxBytes}, `request.cut_short` when fewer bytes arrive than were announced
 */
export async function readBytes(request: Request, maxBytes: number): Promise<Buffer> {
  const announced = request.headers.get("content-length");
  const tooLarge = () =>
    new AppError("request.too_large", {
      maxBytes,
      message: `At most ${maxBytes.toLocaleString("en")} bytes are taken; send less at once.`,
    });
  if (announced !== null && Number(announced) > maxBytes) throw tooLarge();
  const chunks: Uint8Array[] = [];
  let length = 0;
  for await (const chunk of (request.body ?? []) as AsyncIterable<Uint8Array>) {
    length += chunk.byteLength;
    if (length > maxBytes) throw tooLarge();
    chunks.push(chunk);
  }
  if (announced !== null && Number(announced) !== length) {
    throw new AppError("request.cut_short", {
      announced: Number(announced),
      received: length,
      message: "The upload ended early; send it again.",
    });
  }
  return inSlices(joined(chunks, length));
}

/** The first touch of so much memory and its copying take time of their own. */
function* joined(chunks: readonly Uint8Array[], length: number): Steps<Buffer> {
  const whole = Buffer.allocUnsafe(length);
  let at = 0;
  for (const chunk of chunks) {
    whole.set(chunk, at);
    at += chunk.byteLength;
    yield;
  }
  return whole;
}

/** Bytes as JSON. @throws AppError `request.malformed` */
export function parseJson(bytes: Buffer): unknown {
  if (bytes.length === 0) return {};
  try {
    return JSON.parse(new TextDecoder("utf-8", { fatal: true }).decode(bytes));
  } catch (cause) {
    throw new AppError("request.malformed", { message: "The body is not JSON in UTF-8." }, { cause });
  }
}
