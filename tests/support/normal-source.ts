import { expect } from "vitest";
import { randomSource } from "@/lib/domain/compensation/random-source";

/** Standard normal values from a fixed seed, by the method of Box and Muller: the same ones at every run. */
export function normalSource(seed: string): () => number {
  const { nextWord } = randomSource(seed);
  const uniform = () => (nextWord() + 0.5) / 2 ** 32;
  return () => Math.sqrt(-2 * Math.log(uniform())) * Math.cos(2 * Math.PI * uniform());
}

/** A sample of n from a normal population. */
export function drawValues(normal: () => number, n: number, mean = 0, sd = 1): number[] {
  return Array.from({ length: n }, () => mean + sd * normal());
}

/** Share of the trials that hold. */
export function shareOf(trials: number, holds: () => boolean): number {
  let held = 0;
  for (let i = 0; i < trials; i++) if (holds()) held++;
  return held / trials;
}

/** Four standard deviations of a binomial share: one seed in 16,000 would fail a true claim, and ours is fixed. */
function allowance(claimed: number, trials: number): number {
  return 4 * Math.sqrt((claimed * (1 - claimed)) / trials);
}

/** The share observed over the trials is the one claimed, as near as so many trials can tell. */
export function expectShare(observed: number, claimed: number, trials: number): void {
  expect(Math.abs(observed - claimed)).toBeLessThan(allowance(claimed, trials));
}

/** The share observed is at least the one claimed, as near as so many trials can tell. */
export function expectAtLeast(observed: number, claimed: number, trials: number): void {
  expect(observed).toBeGreaterThan(claimed - allowance(claimed, trials));
}
