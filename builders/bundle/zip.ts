import { crc32 } from "@/builders/bundle/crc32";
import { byCodeUnits } from "@/builders/bundle/manifest";
import {
  ATTRIBUTES,
  CENTRAL,
  CENTRAL_BYTES,
  END,
  END_BYTES,
  LOCAL,
  LOCAL_BYTES,
  ZIP_EPOCH_DOS_DATE,
} from "@/builders/bundle/zip-records";
import { AppError } from "@/lib/errors";

/** Largest count of entries and of bytes that a zip without the Zip64 records can tell. */
const ENTRIES_MAX = 65_534;
const BYTES_MAX = 0xffff_ffff;

/** Entries of the directory that are written at a time. */
const HEADS_AT_ONCE = 1_000;

/** Features of version 1.0, told by a maker of version 3.0 on UNIX. */
const VERSION_NEEDED = 10;
const MADE_BY = (3 << 8) | 30;

const encoder = new TextEncoder();

/** What a zip tells of a content in front of it. */
export interface ToldContent {
  /** CRC-32/ISO-HDLC. */
  crc32: number;
  /** Bytes. */
  size: number;
}

interface Entry extends ToldContent {
  /** Plain, so that its characters are its bytes. */
  path: string;
  /** Of its local head, from the start of the zip. */
  offset: number;
}

/**
 * A plain zip: method stored, entries sorted by name (UTF-16 code units), dated 1980-01-01, no folders, no extra
 * fields, no comments (record layout: PKWARE APPNOTE 6.3). The same files give the same bytes on every machine and in every
 * time zone. Made as it is read, so that a lot of 60,000 devices takes no more memory than its files.
 * @param files content by path; texts as UTF-8, paths ASCII without a leading slash.
 * @returns the zip in pieces of any size.
 * @throws AppError `bundle.too_many_files` {files, limit}, `bundle.bad_path` {path}; while read, `bundle.too_large`
 */
export function zipPieces(files: ReadonlyMap<string, Uint8Array | string>): Generator<Uint8Array> {
  if (files.size > ENTRIES_MAX) throw new AppError("bundle.too_many_files", { files: files.size, limit: ENTRIES_MAX });
  const paths = [...files.keys()].sort(byCodeUnits);
  for (const path of paths) if (!isPlainPath(path)) throw new AppError("bundle.bad_path", { path });
  return writeEntries(paths, files);
}

function* writeEntries(
  paths: readonly string[],
  files: ReadonlyMap<string, Uint8Array | string>,
): Generator<Uint8Array> {
  const zip = new PlainZip();
  for (const path of paths) {
    const given = files.get(path) as Uint8Array | string;
    const content = typeof given === "string" ? encoder.encode(given) : given;
    yield zip.head(path, toldOf([content]));
    yield content;
  }
  yield* zip.end();
}

/** What a head tells of a content that comes in pieces. */
export function toldOf(pieces: readonly Uint8Array[]): ToldContent {
  const told = { crc32: 0, size: 0 };
  for (const piece of pieces) {
    told.crc32 = crc32(piece, told.crc32);
    told.size += piece.length;
  }
  return told;
}

/** The records of a plain zip as {@link zipPieces} makes it, for contents that come one after the other. */
export class PlainZip {
  readonly #entries: Entry[] = [];
  #offset = 0;
  #last = "";

  /**
   * What stands in front of an entry's content. Entries are given by path, rising in UTF-16 code units.
   * @param told of the bytes that will follow.
   * @throws AppError `bundle.bad_path` {path}, `bundle.too_many_files`, `bundle.too_large`; Error for one out of order
   */
  head(path: string, told: ToldContent): Uint8Array {
    const head = Buffer.alloc(LOCAL_BYTES + path.length);
    this.#addHead(path, told, head, 0);
    return head;
  }

  #addHead(path: string, { crc32, size }: ToldContent, target: Buffer, at: number): void {
    if (!isPlainPath(path)) throw new AppError("bundle.bad_path", { path });
    if (path <= this.#last) throw new Error(`${path} after ${this.#last}: entries are added by path`);
    if (this.#entries.length === ENTRIES_MAX)
      throw new AppError("bundle.too_many_files", { files: ENTRIES_MAX + 1, limit: ENTRIES_MAX });
    this.#last = path;
    const entry = { path, crc32, size, offset: this.#offset };
    this.#entries.push(entry);
    this.#offset += LOCAL_BYTES + path.length + size;
    assertFits(this.#offset);
    target.writeUInt32LE(LOCAL, at);
    writeHead(target, at + 4, entry);
    target.writeUInt16LE(0, at + LOCAL_BYTES - 2);
    target.write(path, at + LOCAL_BYTES, "latin1");
  }

  /**
   * Whole entries of small files in one piece: a call a file would take longer than its bytes.
   * @throws as {@link head}
   */
  entries(files: readonly { path: string; content: Uint8Array }[]): Uint8Array {
    let length = 0;
    for (const { path, content } of files) length += LOCAL_BYTES + path.length + content.length;
    const piece = Buffer.allocUnsafe(length);
    let at = 0;
    for (const { path, content } of files) {
      this.#addHead(path, { crc32: crc32(content), size: content.length }, piece, at);
      at += LOCAL_BYTES + path.length;
      piece.set(content, at);
      at += content.length;
    }
    return piece;
  }

  /** The directory and the end record, once all contents are written. @throws AppError `bundle.too_large` */
  *end(): Generator<Uint8Array> {
    let directory = 0;
    for (let from = 0; from < this.#entries.length; from += HEADS_AT_ONCE) {
      const heads = centralHeads(this.#entries.slice(from, from + HEADS_AT_ONCE));
      directory += heads.length;
      yield heads;
    }
    assertFits(this.#offset + directory);
    yield endRecord(this.#entries.length, directory, this.#offset);
  }
}

/** What stands in front of an entry's content and, two bytes later, in the directory: from the version needed to the length of the name. */
function writeHead(target: Buffer, at: number, { path, crc32, size }: Entry): void {
  target.writeUInt16LE(VERSION_NEEDED, at);
  // No flags, method stored, midnight.
  target.fill(0, at + 2, at + 8);
  target.writeUInt16LE(ZIP_EPOCH_DOS_DATE, at + 8);
  target.writeUInt32LE(crc32, at + 10);
  target.writeUInt32LE(size, at + 14);
  target.writeUInt32LE(size, at + 18);
  target.writeUInt16LE(path.length, at + 22);
}

function centralHeads(entries: readonly Entry[]): Uint8Array {
  const heads = Buffer.alloc(entries.reduce((sum, { path }) => sum + CENTRAL_BYTES + path.length, 0));
  let at = 0;
  for (const entry of entries) {
    heads.writeUInt32LE(CENTRAL, at);
    heads.writeUInt16LE(MADE_BY, at + 4);
    writeHead(heads, at + 6, entry);
    heads.writeUInt32LE(ATTRIBUTES, at + 38);
    heads.writeUInt32LE(entry.offset, at + 42);
    heads.write(entry.path, at + CENTRAL_BYTES, "latin1");
    at += CENTRAL_BYTES + entry.path.length;
  }
  return heads;
}

function endRecord(entries: number, bytes: number, offset: number): Uint8Array {
  const record = new Uint8Array(END_BYTES);
  const view = new DataView(record.buffer);
  view.setUint32(0, END, true);
  view.setUint16(8, entries, true);
  view.setUint16(10, entries, true);
  view.setUint32(12, bytes, true);
  view.setUint32(16, offset, true);
  return record;
}

function assertFits(bytes: number): void {
  if (bytes > BYTES_MAX) throw new AppError("bundle.too_large", { limit: BYTES_MAX });
}

/** True for a path of letters, digits and . _ - in steps that stay inside the folder. */
export function isPlainPath(path: string): boolean {
  return PLAIN_PATH.test(path);
}

/** No step is "." or "..". */
const PLAIN_PATH = /^(?!\.{1,2}(?:\/|$))[\w.-]+(?:\/(?!\.{1,2}(?:\/|$))[\w.-]+)*$/;
