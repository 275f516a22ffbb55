import { SEAL_WORDS } from "@/lib/domain/seal-words";
import { AppError } from "@/lib/errors";

export const PETALS = 12;

export interface Petal {
  /** Length of the petal, 0 (short) … 7 (long). */
  radius: number;
  /** How deep its tip is cut in, 0 (round) … 3. */
  notch: number;
  /** A line across the petal, 0 (none) … 3 (far out). */
  ring: number;
  filled: boolean;
}

/** What people compare at a glance: a rosette and four words, both from a digest. Machines compare digests. */
export interface Seal {
  words: [string, string, string, string];
  /** Twelve, clockwise from the top. */
  petals: Petal[];
}

/**
 * The seal of a digest: bytes 0–3 give the words, bytes 4–15 one petal each (bits 0–2 radius, 3–4 notch, 5–6 ring, 7 filled).
 * The words alone stand for 32 of the digest's bits: enough to tell two packages of a lot apart, too few to prove one.
 * @param digestHex SHA-256 in hex, 64 digits.
 * @throws AppError `seal.not_a_digest`
 */
export function sealOf(digestHex: string): Seal {
  if (!/^[0-9a-fA-F]{64}$/.test(digestHex)) throw new AppError("seal.not_a_digest", { length: digestHex.length });
  const byte = (i: number) => Number.parseInt(digestHex.slice(2 * i, 2 * i + 2), 16);
  const word = (i: number) => SEAL_WORDS[byte(i)] as string;
  const petals = Array.from({ length: PETALS }, (_, i) => petalOf(byte(4 + i)));
  return { words: [word(0), word(1), word(2), word(3)], petals };
}

function petalOf(byte: number): Petal {
  return { radius: byte & 7, notch: (byte >> 3) & 3, ring: (byte >> 5) & 3, filled: byte >> 7 === 1 };
}

/** A seal as shapes in a square of `size` units, to be drawn with strokes of about 1.5 % of it. */
export interface SealShapes {
  /** SVG path data: the outline, and the line across where there is one. */
  petals: { outline: string; ring: string | null; filled: boolean }[];
  centre: { x: number; y: number; ringRadius: number; dotRadius: number };
}

/** Shares of half the size: where petals start, the shortest and longest reach, and the shoulder below the tip. */
const INNER = 0.26;
const REACH_MIN = 0.6;
const REACH_MAX = 0.96;
const SHOULDER = 0.86;
const NOTCH_STEP = 0.09;
/** Half the angle that a petal takes at its foot and at its shoulder, in radians; twelve share a turn. */
const FOOT_ANGLE = 0.11;
const SHOULDER_ANGLE = 0.21;

/** The shapes of a seal; the same numbers give the same text everywhere, to a tenth of a unit. */
export function sealPaths(seal: Seal, size: number): SealShapes {
  const half = size / 2;
  return {
    petals: seal.petals.map((petal, i) => petalShapes(petal, (i * 2 * Math.PI) / PETALS, half)),
    centre: { x: half, y: half, ringRadius: round(half * 0.17), dotRadius: round(half * 0.07) },
  };
}

function petalShapes(petal: Petal, angle: number, half: number): SealShapes["petals"][number] {
  const point = (share: number, aside: number) => {
    const x = half + half * share * Math.sin(angle + aside);
    const y = half - half * share * Math.cos(angle + aside);
    return `${round(x)},${round(y)}`;
  };
  const reach = REACH_MIN + ((REACH_MAX - REACH_MIN) * petal.radius) / 7;
  const shoulder = reach * SHOULDER;
  const tip = reach * (1 - NOTCH_STEP * petal.notch);
  const outline =
    `M${point(INNER, -FOOT_ANGLE)} L${point(shoulder, -SHOULDER_ANGLE)} ` +
    `Q${point(tip, 0)} ${point(shoulder, SHOULDER_ANGLE)} L${point(INNER, FOOT_ANGLE)} Z`;
  if (petal.ring === 0) return { outline, ring: null, filled: petal.filled };
  const part = petal.ring / 4;
  const across = INNER + (shoulder - INNER) * part;
  const aside = FOOT_ANGLE + (SHOULDER_ANGLE - FOOT_ANGLE) * part;
  return { outline, ring: `M${point(across, -aside)} L${point(across, aside)}`, filled: petal.filled };
}

function round(value: number): number {
  return Math.round(value * 10) / 10;
}
