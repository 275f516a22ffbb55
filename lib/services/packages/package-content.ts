import { hexPath } from "@/builders/bundle/bundle";
import { ByteSink } from "@/builders/bundle/byte-sink";
import { HexTemplate } from "@/builders/bundle/hex-template";
import { byCodeUnits } from "@/builders/bundle/manifest";
import { sha256Hex } from "@/builders/bundle/sha256";
import { ValuesTemplate } from "@/builders/bundle/values-template";
import { type CompiledLayout, compileLayout } from "@/builders/codec/compile-layout";
import { writeImageHex } from "@/builders/codec/files/hex-image";
import type { Db } from "@/db/executor";
import {
  eachImages,
  type ImageRow,
  listDerivationsOfSets,
  listImagesOfSerials,
  listSerials,
} from "@/db/queries/images";
import { getLayoutById } from "@/db/queries/layouts";
import { slicesOf } from "@/db/slices";
import { AppError } from "@/lib/errors";

/** Images read at a time: bounds memory and how long the event loop is held. */
const PAGE_IMAGES = 500;

export interface BuiltFrom {
  id: string;
  layout: CompiledLayout;
}

/** A built package with its layout, ready for its bytes to be made again. */
export async function openContent(db: Db, pkg: { id: string; layoutId: string }): Promise<BuiltFrom> {
  return { id: pkg.id, layout: compileLayout((await getLayoutById(db, pkg.layoutId)).document) };
}

/**
 * `images.jsonl` in pieces, made from the stored images and held against the digest of what was built, so that what the code
 * of today would write otherwise is refused instead of handed out: at the end, when the pieces are out.
 * @throws AppError `package.bytes_differ` {path}
 */
export async function* eachValuesPiece(db: Db, { id, layout }: BuiltFrom, sha256: Buffer): AsyncGenerator<Buffer> {
  const sink = new ByteSink({ keep: true });
  const template = new ValuesTemplate(layout);
  for await (const images of eachImages(db, id, PAGE_IMAGES)) {
    const setIds = images.map((image) => image.coefficientSetId);
    const derivations = await listDerivationsOfSets(db, setIds);
    for (const { serial, sha256: digest, bytes, coefficientSetId } of images) {
      const derivation = derivations.get(coefficientSetId) as string;
      template.add(sink, { serial, derivation, sha256: digest.toString("hex") }, bytes);
    }
    yield* sink.take();
  }
  const rest = sink.finish();
  yield* rest.pieces;
  if (rest.sha256 !== sha256.toString("hex")) throw bytesDiffer("images.jsonl");
}

/** A HEX file of a bundle. */
export interface HexFile {
  path: string;
  content: Buffer;
}

/**
 * All HEX files of a package by path, some at a time, each held against the digest of what was built.
 * @throws AppError `package.bytes_differ` {path}
 */
export async function* eachHexFile(db: Db, { id, layout }: BuiltFrom): AsyncGenerator<HexFile[]> {
  const template = new HexTemplate(layout);
  // By path: a dot stands after a hyphen, and so "A.hex" after "A-1.hex".
  const serials = (await listSerials(db, id)).sort((a, b) => byCodeUnits(`${a}.`, `${b}.`));
  for (const page of slicesOf(serials, PAGE_IMAGES)) {
    const images = await listImagesOfSerials(db, id, page);
    yield page.map((serial) => {
      const image = images.get(serial);
      const path = hexPath(serial);
      if (!image) throw bytesDiffer(path);
      const content = template.bytesOf(image.bytes);
      if (sha256Hex(content) !== image.hexSha256.toString("hex")) throw bytesDiffer(path);
      return { path, content };
    });
  }
}

/** An image as Intel HEX. @throws AppError `package.bytes_differ` where it is not the text that was built */
export function hexOf(layout: CompiledLayout, image: ImageRow): string {
  const hex = writeImageHex(layout, image.bytes);
  if (sha256Hex(hex) === image.hexSha256.toString("hex")) return hex;
  throw bytesDiffer(`images/${image.serial}.hex`);
}

function bytesDiffer(path: string): AppError {
  const message = `${path} cannot be written as it was built. Nothing is handed out; report this with the package's id.`;
  return new AppError("package.bytes_differ", { path, message });
}
