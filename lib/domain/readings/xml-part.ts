import type JSZip from "jszip";
import { SaxesParser } from "saxes";
import { AppError } from "@/lib/errors";

/** Elements nested deeper than this are in no workbook. */
const DEPTH_MAX = 64;

/** What is told of an XML part: names are local ones, attributes stay as they are written. */
export interface PartReader {
  open?(name: string, attributes: Record<string, string>): void;
  text?(text: string): void;
  close?(name: string): void;
}

/** A file of a zip as it is unpacked; JSZip documents `ZipObject#internalStream`, its types leave it out. */
interface PieceStream {
  on(event: "data", take: (chunk: Uint8Array) => void): PieceStream;
  on(event: "error", take: (cause: unknown) => void): PieceStream;
  on(event: "end", take: () => void): PieceStream;
  pause(): PieceStream;
  resume(): PieceStream;
}

const localName = (name: string) => name.slice(name.indexOf(":") + 1);

/**
 * Reads an XML part of a zip while it is unpacked, piece by piece, and gives up as soon as it grows too large: what a zip says on
 * the size of its files is not to be relied on. A document type, and with it any entity of its own, is refused.
 * @param onProgress gets what was read of the size that the zip tells, from 0 to 1.
 * @throws AppError `workbook.no_part` {part}, `workbook.too_large` {bytesMax}, `workbook.not_well_formed` {part}, and what `reader`
 * throws
 */
export async function readXmlPart(
  zip: JSZip,
  part: string,
  bytesMax: number,
  reader: PartReader,
  onProgress?: (share: number) => void,
): Promise<void> {
  const file = zip.file(part);
  if (!file) throw new AppError("workbook.no_part", { part, message: `The workbook has no ${part}.` });
  const decoder = new TextDecoder("utf-8", { fatal: true });
  const parser = parserFor(part, reader);
  const told = (file as unknown as { _data?: { uncompressedSize?: number } })._data?.uncompressedSize ?? 0;
  let length = 0;
  const take = (chunk: Uint8Array) => {
    length += chunk.length;
    if (length > bytesMax) {
      const message = `The workbook unpacks to more than ${Math.round(bytesMax / 1e6)} MB in ${part}; it is no table of readings.`;
      throw new AppError("workbook.too_large", { bytesMax, message });
    }
    parser.write(decode(part, () => decoder.decode(chunk, { stream: true })));
    if (told > 0) onProgress?.(Math.min(1, length / told));
  };
  await unpack(file, part, take);
  parser.write(decode(part, () => decoder.decode()));
  parser.close();
}

/** Runs the pieces of a file through `take`; what it throws ends the unpacking. */
function unpack(file: JSZip.JSZipObject, part: string, take: (chunk: Uint8Array) => void): Promise<void> {
  return new Promise((resolve, reject) => {
    const stream = (file as unknown as { internalStream(type: "uint8array"): PieceStream }).internalStream(
      "uint8array",
    );
    stream
      .on("data", (chunk) => {
        try {
          take(chunk);
        } catch (error) {
          stream.pause();
          reject(error);
        }
      })
      .on("error", (cause) => reject(notWellFormed(part, cause)))
      .on("end", () => resolve())
      .resume();
  });
}

function notWellFormed(part: string, cause: unknown): AppError {
  const message = `The workbook is damaged in ${part}. Save it again as XLSX, or as CSV.`;
  return new AppError("workbook.not_well_formed", { part, message }, { cause });
}

function decode(part: string, text: () => string): string {
  try {
    return text();
  } catch (cause) {
    throw notWellFormed(part, cause);
  }
}

function parserFor(part: string, reader: PartReader): SaxesParser {
  const parser = new SaxesParser({ position: false });
  let depth = 0;
  parser.on("error", (error) => {
    throw notWellFormed(part, error);
  });
  parser.on("doctype", () => {
    throw notWellFormed(part, "document type");
  });
  parser.on("opentag", ({ name, attributes }) => {
    if (++depth > DEPTH_MAX) throw notWellFormed(part, "depth");
    reader.open?.(localName(name), attributes as Record<string, string>);
  });
  if (reader.text) {
    parser.on("text", (text) => reader.text?.(text));
    parser.on("cdata", (text) => reader.text?.(text));
  }
  parser.on("closetag", ({ name }) => {
    depth--;
    reader.close?.(localName(name));
  });
  return parser;
}
