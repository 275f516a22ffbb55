import { AppError } from "@/lib/errors";

/** A cyclic redundancy check in the usual parameters: width 8, 16, 24 or 32 bits; poly, init and xorout as unsigned numbers. */
export interface CrcParameters {
  width: 8 | 16 | 24 | 32;
  poly: number;
  init: number;
  refin: boolean;
  refout: boolean;
  xorout: number;
}

/** Check of the bytes from `from` up to, not including, `end`, as an unsigned number; a sum over them has the same shape. */
export type Crc = (bytes: Uint8Array, from: number, end: number) => number;

const parameters = (
  width: CrcParameters["width"],
  poly: number,
  init: number,
  reflected: boolean,
  xorout: number,
): CrcParameters => ({ width, poly, init, refin: reflected, refout: reflected, xorout });

/** Parameters by catalogue name, as in the public catalogue of parametrised CRC algorithms. */
export const CRC_CATALOGUE: Readonly<Record<string, CrcParameters>> = {
  "CRC-8/SMBUS": parameters(8, 0x07, 0x00, false, 0x00),
  "CRC-8/MAXIM-DOW": parameters(8, 0x31, 0x00, true, 0x00),
  "CRC-8/SAE-J1850": parameters(8, 0x1d, 0xff, false, 0xff),
  "CRC-8/AUTOSAR": parameters(8, 0x2f, 0xff, false, 0xff),
  "CRC-16/IBM-3740": parameters(16, 0x1021, 0xffff, false, 0x0000),
  "CRC-16/MODBUS": parameters(16, 0x8005, 0xffff, true, 0x0000),
  "CRC-16/XMODEM": parameters(16, 0x1021, 0x0000, false, 0x0000),
  "CRC-16/KERMIT": parameters(16, 0x1021, 0x0000, true, 0x0000),
  "CRC-16/ARC": parameters(16, 0x8005, 0x0000, true, 0x0000),
  "CRC-16/GENIBUS": parameters(16, 0x1021, 0xffff, false, 0xffff),
  "CRC-16/IBM-SDLC": parameters(16, 0x1021, 0xffff, true, 0xffff),
  "CRC-16/USB": parameters(16, 0x8005, 0xffff, true, 0xffff),
  "CRC-32/ISO-HDLC": parameters(32, 0x04c11db7, 0xffffffff, true, 0xffffffff),
  "CRC-32/MPEG-2": parameters(32, 0x04c11db7, 0xffffffff, false, 0x00000000),
  "CRC-32/ISCSI": parameters(32, 0x1edc6f41, 0xffffffff, true, 0xffffffff),
};

const made = new Map<string, Crc>();

/** Parameters of a named algorithm; undefined for a name that is not in the catalogue. */
export function findCrcParameters(name: string): CrcParameters | undefined {
  return Object.hasOwn(CRC_CATALOGUE, name) ? CRC_CATALOGUE[name] : undefined;
}

/** The named check, its table made once. @throws AppError `checksum.unknown_algorithm` {algorithm} */
export function getCrc(name: string): Crc {
  const known = made.get(name);
  if (known) return known;
  const found = findCrcParameters(name);
  if (!found) throw new AppError("checksum.unknown_algorithm", { algorithm: name });
  const crc = makeCrc(found);
  made.set(name, crc);
  return crc;
}

/**
 * Builds the table-driven check for any parameters of 8, 16, 24 or 32 bits. Four bytes are taken at a time, each by a table of its own:
 * the register's state after a byte is what that byte and the three behind it make of it.
 */
export function makeCrc(p: CrcParameters): Crc {
  const turn = p.refin !== p.refout;
  const run = p.refin ? reflectedRun(p) : forwardRun(p);
  return (bytes, from, end) => {
    const register = run(bytes, from, end);
    return ((turn ? reflectBits(register, p.width) : register) ^ p.xorout) >>> 0;
  };
}

/** The register stands at the lower end of 32 bits, its first bit lowest. */
function reflectedRun(p: CrcParameters): Crc {
  const poly = reflectBits(p.poly, p.width);
  const start = reflectBits(p.init, p.width);
  const step = (register: number) => (register >>> 1) ^ (register & 1 ? poly : 0);
  const first = byteTable((byte) => byte, step);
  const [a, b, c, d] = tablesBehind(first, (register) => (register >>> 8) ^ at(first, register & 0xff));
  return (bytes, from, end) => {
    let register = start;
    let i = from;
    for (; i + 3 < end; i += 4) {
      const x =
        register ^ (at(bytes, i) | (at(bytes, i + 1) << 8) | (at(bytes, i + 2) << 16) | (at(bytes, i + 3) << 24));
      register = at(d, x & 0xff) ^ at(c, (x >>> 8) & 0xff) ^ at(b, (x >>> 16) & 0xff) ^ at(a, x >>> 24);
    }
    for (; i < end; i++) register = (register >>> 8) ^ at(a, (register ^ at(bytes, i)) & 0xff);
    return register >>> 0;
  };
}

/** The register stands at the upper end of 32 bits, its first bit highest, and so needs no mask. */
function forwardRun(p: CrcParameters): Crc {
  const below = 32 - p.width;
  const poly = p.poly << below;
  const start = p.init << below;
  const step = (register: number) => (register << 1) ^ (register < 0 ? poly : 0);
  const first = byteTable((byte) => byte << 24, step);
  const [a, b, c, d] = tablesBehind(first, (register) => (register << 8) ^ at(first, register >>> 24));
  return (bytes, from, end) => {
    let register = start;
    let i = from;
    for (; i + 3 < end; i += 4) {
      const x =
        register ^ ((at(bytes, i) << 24) | (at(bytes, i + 1) << 16) | (at(bytes, i + 2) << 8) | at(bytes, i + 3));
      register = at(d, x >>> 24) ^ at(c, (x >>> 16) & 0xff) ^ at(b, (x >>> 8) & 0xff) ^ at(a, x & 0xff);
    }
    for (; i < end; i++) register = (register << 8) ^ at(a, (register >>> 24) ^ at(bytes, i));
    return register >>> below;
  };
}

/** What each byte makes of an empty register, bit by bit. */
function byteTable(place: (byte: number) => number, step: (register: number) => number): Int32Array {
  return Int32Array.from({ length: 256 }, (_, byte) => {
    let register = place(byte);
    for (let bit = 0; bit < 8; bit++) register = step(register);
    return register;
  });
}

/** The table of a byte, and those of one with one, two and three zero bytes behind it. */
function tablesBehind(first: Int32Array, next: (register: number) => number) {
  const second = first.map(next);
  const third = second.map(next);
  return [first, second, third, third.map(next)] as const;
}

/** An element that is known to be there. */
const at = (list: Int32Array | Uint8Array, index: number) => list[index] as number;

/** The lowest `width` bits in reverse order. */
export function reflectBits(value: number, width: number): number {
  let rest = value >>> 0;
  let turned = 0;
  for (let bit = 0; bit < width; bit++) {
    turned = turned * 2 + (rest & 1);
    rest >>>= 1;
  }
  return turned;
}
