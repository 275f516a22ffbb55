import { AppError } from "@/lib/errors";

/** Whole numbers that look random; the same state gives the same numbers on every machine. */
export interface RandomSource {
  /** Uniform in 0 … 2³² − 1. */
  nextWord(): number;
  /** Uniform in 0 … bound − 1, without the bias of a remainder. @param bound 1 … 2³². */
  nextBelow(bound: number): number;
}

const WORDS = 2 ** 32;

function rotateLeft(word: number, by: number): number {
  return (word << by) | (word >>> (32 - by));
}

/** The four 32-bit words of a seed written as 32 hexadecimal digits, highest word first. */
function wordsOf(seed: string): number[] {
  const words = /^[0-9a-f]{32}$/i.test(seed)
    ? [0, 8, 16, 24].map((at) => Number.parseInt(seed.slice(at, at + 8), 16))
    : [];
  if (!words.some((word) => word !== 0))
    throw new AppError("draw.seed_invalid", { message: "A seed is 32 hexadecimal digits, not all of them 0." });
  return words;
}

/**
 * The generator xoshiro128** (version 1.1), its state being the four words of the seed.
 * Source: D. Blackman and S. Vigna, Scrambled Linear Pseudorandom Number Generators (ACM TOMS 47, 2021).
 * @param seed 128 bits drawn at random, as 32 hexadecimal digits.
 * @throws AppError `draw.seed_invalid`.
 */
export function randomSource(seed: string): RandomSource {
  const state = Int32Array.from(wordsOf(seed));
  const nextWord = (): number => {
    const [s0, s1, s2, s3] = state as unknown as [number, number, number, number];
    const result = Math.imul(rotateLeft(Math.imul(s1, 5), 7), 9) >>> 0;
    state[2] = s2 ^ s0 ^ (s1 << 9);
    state[3] = rotateLeft(s3 ^ s1, 11);
    state[1] = s1 ^ s2 ^ s0;
    state[0] = s0 ^ s3 ^ s1;
    return result;
  };
  const nextBelow = (bound: number): number => {
    const whole = WORDS - (WORDS % bound);
    for (;;) {
      const word = nextWord();
      if (word < whole) return word % bound;
    }
  };
  return { nextWord, nextBelow };
}
