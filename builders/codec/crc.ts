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

/** Builds the table-driven check for any parameters of 8, 16, 24 or 32 bits. */
export function makeCrc(p: CrcParameters): Crc {
  const table = p.refin ? reflectedTable(p) : forwardTable(p);
  const mask = maskOf(p.width);
  const start = p.refin ? reflectBits(p.init, p.width) : p.init >>> 0;
  const turn = p.refin !== p.refout;
  const finish = (register: number) => ((turn ? reflectBits(register, p.width) : register) ^ p.xorout) >>> 0;
  if (p.refin) {
    return (bytes, from, end) => {
      let register = start;
      for (let i = from; i < end; i++) {
        register = (register >>> 8) ^ (table[(register ^ (bytes[i] as number)) & 0xff] as number);
      }
      return finish(register >>> 0);
    };
  }
  const top = p.width - 8;
  return (bytes, from, end) => {
    let register = start;
    for (let i = from; i < end; i++) {
      register = ((register << 8) ^ (table[((register >>> top) ^ (bytes[i] as number)) & 0xff] as number)) & mask;
    }
    return finish(register >>> 0);
  };
}

function forwardTable(p: CrcParameters): Uint32Array {
  const topBit = 2 ** (p.width - 1);
  const mask = maskOf(p.width);
  return Uint32Array.from({ length: 256 }, (_, byte) => {
    let register = (byte << (p.width - 8)) >>> 0;
    for (let bit = 0; bit < 8; bit++) {
      const carry = register >= topBit;
      register = (((register << 1) & mask) ^ (carry ? p.poly : 0)) >>> 0;
    }
    return register;
  });
}

function reflectedTable(p: CrcParameters): Uint32Array {
  const poly = reflectBits(p.poly, p.width);
  return Uint32Array.from({ length: 256 }, (_, byte) => {
    let register = byte;
    for (let bit = 0; bit < 8; bit++) register = ((register >>> 1) ^ (register & 1 ? poly : 0)) >>> 0;
    return register;
  });
}

/** All ones in `width` bits, as a 32-bit operand. */
function maskOf(width: number): number {
  return width === 32 ? -1 : 2 ** width - 1;
}

function reflectBits(value: number, width: number): number {
  let rest = value >>> 0;
  let turned = 0;
  for (let bit = 0; bit < width; bit++) {
    turned = turned * 2 + (rest & 1);
    rest >>>= 1;
  }
  return turned;
}
