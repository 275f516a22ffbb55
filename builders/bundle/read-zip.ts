import { crc32 } from "@/builders/bundle/crc32";
import { isPlainPath } from "@/builders/bundle/zip";
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

/**
 * Reads the kind of zip that {@link zipPieces} makes and no other (record layout: PKWARE APPNOTE 6.3). Being strict keeps
 * out what readers disagree on: entries twice, hidden bytes between entries, directories that tell other than the
 * entries, paths that leave the folder, compressed entries that unpack to more than they take.
 * @returns content by path, in the order of the file; the contents are views into `bytes`.
 * @throws AppError `bundle.zip_malformed` {at}
 */
export function readZip(bytes: Uint8Array): Map<string, Uint8Array> {
  const view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
  const end = bytes.length - END_BYTES;
  const ends = end >= 0 && view.getUint32(end, true) === END;
  const begins = bytes.length >= LOCAL_BYTES && view.getUint32(0, true) === LOCAL;
  if (!ends && !begins)
    throw malformed(0, "This is no zip: it has no entry in front and no end record as its last bytes");
  assertZip(ends, end, "has no end record as its last bytes: it may be cut off");
  const count = view.getUint16(end + 10, true);
  const directory = view.getUint32(end + 16, true);
  const plainEnd =
    view.getUint32(end + 4, true) === 0 &&
    view.getUint16(end + 8, true) === count &&
    view.getUint16(end + 20, true) === 0;
  assertZip(plainEnd, end, "spans disks or has a comment");
  assertZip(directory + view.getUint32(end + 12, true) === end, end, "has bytes between directory and end record");

  const files = new Map<string, Uint8Array>();
  let at = 0;
  let entry = directory;
  let last = "";
  for (let i = 0; i < count; i++) {
    assertZip(entry + CENTRAL_BYTES <= end && view.getUint32(entry, true) === CENTRAL, entry, "has a broken directory");
    assertZip(view.getUint32(entry + 42, true) === at, entry, "has bytes between its entries");
    const { path, content, next } = readEntry(bytes, view, at, directory);
    assertSameHead(view, at, entry, path.length);
    assertZip(path > last, at, "has entries that are not in order, or one twice");
    const name = textOf(bytes.subarray(entry + CENTRAL_BYTES, entry + CENTRAL_BYTES + path.length));
    assertZip(name === path, entry, "names an entry differently in its directory");
    files.set(path, content);
    last = path;
    at = next;
    entry += CENTRAL_BYTES + path.length;
  }
  assertZip(at === directory && entry === end, at, "has bytes that belong to no entry");
  return files;
}

function readEntry(bytes: Uint8Array, view: DataView, at: number, directory: number) {
  assertZip(at + LOCAL_BYTES <= directory && view.getUint32(at, true) === LOCAL, at, "has a broken entry");
  const start = at + LOCAL_BYTES + view.getUint16(at + 26, true);
  assertZip(start <= directory, at, "has an entry that runs into the directory");
  const path = textOf(bytes.subarray(at + LOCAL_BYTES, start));
  assertZip(isPlainPath(path), at, "has an entry whose path is not plain");
  const assert = (holds: boolean, reason: string) => assertZip(holds, at, `${reason}: ${path}`);
  assert(view.getUint16(at + 6, true) === 0, "has an entry with flags");
  assert(view.getUint16(at + 8, true) === 0, "has an entry that is not stored");
  const dated = view.getUint16(at + 10, true) === 0 && view.getUint16(at + 12, true) === ZIP_EPOCH_DOS_DATE;
  assert(dated, "has an entry with another date than 1980-01-01");
  const size = view.getUint32(at + 18, true);
  assert(view.getUint32(at + 22, true) === size, "has an entry of two sizes");
  assert(view.getUint16(at + 28, true) === 0, "has an entry with extra fields");
  assert(start + size <= directory, "has an entry that runs into the directory");
  const content = bytes.subarray(start, start + size);
  assert(crc32(content) === view.getUint32(at + 14, true), "has a damaged entry");
  return { path, content, next: start + size };
}

/** Version, flags, method, date, check, sizes and length of the name stand twice and have to agree; nothing may follow. */
function assertSameHead(view: DataView, local: number, central: number, nameLength: number): void {
  for (let i = 4; i < 28; i += 2) {
    const same = view.getUint16(local + i, true) === view.getUint16(central + i + 2, true);
    assertZip(same, central, "has an entry that its directory describes differently");
  }
  const plain =
    view.getUint16(central + 28, true) === nameLength &&
    view.getUint16(central + 30, true) === 0 &&
    view.getUint16(central + 32, true) === 0 &&
    view.getUint16(central + 34, true) === 0;
  assertZip(plain, central, "has a directory with extra fields or comments");
  assertZip(view.getUint32(central + 38, true) === ATTRIBUTES, central, "has an entry that is no plain file");
}

function textOf(bytes: Uint8Array): string {
  return String.fromCharCode(...bytes.subarray(0, 300));
}

function assertZip(holds: boolean, at: number, reason: string): void {
  if (!holds) throw malformed(at, `The zip ${reason}`);
}

const malformed = (at: number, message: string) => new AppError("bundle.zip_malformed", { at, message });
