import type { Db } from "@/db/executor";
import { eachImageBytes, type ImageBytesRow } from "@/db/queries/images";

/** The images of one serial in two packages; one of them may be missing, never both. */
export interface PairedImages {
  serial: string;
  from: ImageBytesRow | undefined;
  to: ImageBytesRow | undefined;
}

/**
 * Walks two packages side by side in the order of their serials, after a serial; only some rows of each are held at a time.
 * @param options.after serial after which to begin. @param options.size rows of each that are read at a time.
 */
export async function* pairImages(
  db: Db,
  fromId: string,
  toId: string,
  options: { after?: string; size?: number } = {},
): AsyncGenerator<PairedImages> {
  const olds = rowsOf(eachImageBytes(db, fromId, options));
  const news = rowsOf(eachImageBytes(db, toId, options));
  let from = (await olds.next()).value;
  let to = (await news.next()).value;
  while (from || to) {
    const serial = lesser(from?.serial, to?.serial);
    const pair = {
      serial,
      from: from?.serial === serial ? from : undefined,
      to: to?.serial === serial ? to : undefined,
    };
    yield pair;
    if (pair.from) from = (await olds.next()).value;
    if (pair.to) to = (await news.next()).value;
  }
}

/** The one that stands first where a serial is missing on the other side. */
function lesser(a: string | undefined, b: string | undefined): string {
  if (a === undefined || b === undefined) return (a ?? b) as string;
  return a < b ? a : b;
}

async function* rowsOf(pages: AsyncIterable<ImageBytesRow[]>): AsyncGenerator<ImageBytesRow, undefined> {
  for await (const page of pages) yield* page;
  return undefined;
}
