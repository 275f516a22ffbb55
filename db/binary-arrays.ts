/**
 * One-dimensional arrays in PostgreSQL's binary format (documentation of the frontend/backend protocol; `array_send` and the
 * element types' send functions), to be given as parameters of statements that `unnest` them. The driver passes a Buffer on as
 * it is. Writing and reading numbers as decimal text, which it does otherwise, takes longer than storing them.
 */

const HEADER_BYTES = 20;
const LENGTH_BYTES = 4;
const OID = { int4: 23, text: 25, float8: 701, timestamptz: 1184, uuid: 2950 } as const;
/** 2000-01-01T00:00:00Z, from which PostgreSQL counts microseconds. */
const EPOCH_MS = 946_684_800_000;
const TWO_32 = 2 ** 32;

function headerOf(oid: number, count: number, bytes: number): Buffer {
  const buffer = Buffer.allocUnsafe(HEADER_BYTES + bytes);
  buffer.writeInt32BE(count === 0 ? 0 : 1, 0);
  buffer.writeInt32BE(1, 4);
  buffer.writeInt32BE(oid, 8);
  buffer.writeInt32BE(count, 12);
  buffer.writeInt32BE(1, 16);
  return count === 0 ? buffer.subarray(0, 12) : buffer;
}

/** An array of elements of one width; null and undefined become NULL. */
function fixedArray<T>(
  oid: number,
  width: number,
  values: readonly (T | null | undefined)[],
  write: (view: DataView, value: T, at: number, buffer: Buffer) => void,
): Buffer {
  const buffer = headerOf(oid, values.length, values.length * (LENGTH_BYTES + width));
  const view = new DataView(buffer.buffer, buffer.byteOffset, buffer.byteLength);
  let at = HEADER_BYTES;
  for (const value of values) {
    const isThere = value !== null && value !== undefined;
    view.setInt32(at, isThere ? width : -1);
    at += LENGTH_BYTES;
    if (!isThere) continue;
    write(view, value, at, buffer);
    at += width;
  }
  return values.length === 0 ? buffer : buffer.subarray(0, at);
}

/** `int4[]` from integers of 32 bits. */
export function int4Array(values: readonly (number | null | undefined)[]): Buffer {
  return fixedArray(OID.int4, 4, values, (view, value, at) => view.setInt32(at, value));
}

/** `float8[]` from numbers, bit by bit. */
export function float8Array(values: readonly (number | null | undefined)[]): Buffer {
  return fixedArray(OID.float8, 8, values, (view, value, at) => view.setFloat64(at, value));
}

/** `timestamptz[]` from RFC 3339 times, to the millisecond. */
export function timestamptzArray(values: readonly string[]): Buffer {
  return fixedArray(OID.timestamptz, 8, values, (view, value, at) => {
    const microseconds = (Date.parse(value) - EPOCH_MS) * 1000;
    const high = Math.floor(microseconds / TWO_32);
    view.setInt32(at, high);
    view.setUint32(at + 4, microseconds - high * TWO_32);
  });
}

/** `uuid[]` from UUIDs as text. Runs of one value, as devices have them in a table of readings, are copied. */
export function uuidArray(values: readonly string[]): Buffer {
  let before: string | undefined;
  return fixedArray(OID.uuid, 16, values, (_, value, at, buffer) => {
    if (value === before) buffer.copyWithin(at, at - 16 - LENGTH_BYTES, at - LENGTH_BYTES);
    else buffer.write(value.replaceAll("-", ""), at, "hex");
    before = value;
  });
}

/** `text[]` from texts without NUL. */
export function textArray(values: readonly (string | null | undefined)[]): Buffer {
  const bytes = values.map((value) => (value === null || value === undefined ? undefined : Buffer.from(value)));
  const size = bytes.reduce((sum, one) => sum + LENGTH_BYTES + (one?.length ?? 0), 0);
  const buffer = headerOf(OID.text, values.length, size);
  let at = HEADER_BYTES;
  for (const one of bytes) {
    buffer.writeInt32BE(one?.length ?? -1, at);
    at += LENGTH_BYTES + (one?.copy(buffer, at + LENGTH_BYTES) ?? 0);
  }
  return buffer;
}
