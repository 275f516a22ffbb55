import { alignmentOf } from "@/builders/codec/lint/lint-placement";
import { type MendContext, type Mender, partOf, readPart, setMember } from "@/builders/codec/mend/mend-context";
import type { ByteRange } from "@/schemas/documents/layout";

export interface PlaceWish {
  /** Bytes. */
  width: number;
  /** Offset to look from; what lies before it is looked through last. */
  from?: number;
  /** A number, which starts at multiples of its width and lies on one page; text may start anywhere. */
  number?: boolean;
  /** JSON pointer of the part itself, which is not in its own way. */
  except?: string;
  /** Inclusive range to keep clear of: what a checksum covers. */
  outside?: ByteRange;
}

/** The first offset from `from` on, then from the start, where so many bytes are free; undefined where there is none. */
export function findFreePlace(context: MendContext, wish: PlaceWish): number | undefined {
  const { width, from = 0, number = false, except, outside } = wish;
  const { bytes, pageBytes, baseAddress } = context.layout.memory;
  const claims = claimsOf(context, except);
  const fits = (at: number) => {
    if (outside && at <= outside[1] && at + width > outside[0]) return false;
    const address = baseAddress + at;
    if (number && address % alignmentOf(width) !== 0) return false;
    const onePage = Math.floor(address / pageBytes) === Math.floor((address + width - 1) / pageBytes);
    if (number && width <= pageBytes && pageBytes > 1 && !onePage) return false;
    for (let i = at; i < at + width; i++) if (claims[i] !== 0) return false;
    return true;
  };
  const last = bytes - width;
  for (let at = from; at <= last; at++) if (fits(at)) return at;
  for (let at = 0; at < Math.min(from, last + 1); at++) if (fits(at)) return at;
  return undefined;
}

/** How many parts claim each byte of the memory, one part left out. */
function claimsOf({ layout, extents }: MendContext, except: string | undefined): Uint16Array {
  const claims = new Uint16Array(layout.memory.bytes);
  for (const { path, at, end } of extents) {
    if (path === except) continue;
    for (let i = Math.max(0, at); i < Math.min(end, claims.length); i++) claims[i] = (claims[i] as number) + 1;
  }
  return claims;
}

/** True where nothing else claims the bytes from `at` on. */
export function isFree({ layout, extents }: MendContext, at: number, width: number, except: string): boolean {
  const clear = !extents.some((part) => part.path !== except && part.at < at + width && part.end > at);
  return clear && at + width <= layout.memory.bytes;
}

/** Moves a field or checksum to where its bytes are free. */
export const moveToFreePlace: Mender = (problem, context) => {
  const path = partOf(problem.path);
  const part = context.extents.find((one) => one.path === path);
  if (!part || part.kind === "kept") return undefined;
  const isText = /^"(ascii|bytes)"$/.test(context.editor.raw(`${path}/type`) ?? "");
  const outside = part.kind === "checksum" ? readPart<ByteRange>(context, `${path}/over`) : undefined;
  const wish = { width: part.end - part.at, from: part.at, number: !isText, except: path, outside };
  const at = findFreePlace(context, wish);
  if (at === undefined || at === part.at) return undefined;
  return { label: `Move “${part.name}” to ${at}`, edits: setMember(context, path, "at", at) };
};

/** Moves what ends outside the memory inside, or lets the memory grow to the next power of two where nothing is free. */
export const bringInside: Mender = (problem, context) => {
  const moved = moveToFreePlace(problem, context);
  if (moved) return moved;
  const end = Math.max(...context.extents.map((part) => part.end));
  const bytes = 2 ** Math.ceil(Math.log2(end));
  if (bytes > 65536) return undefined;
  return { label: `Make the memory ${bytes} bytes`, edits: setMember(context, "/memory", "bytes", bytes) };
};
