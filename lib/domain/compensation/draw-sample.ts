import { AppError } from "@/lib/errors";
import { type RandomSource, randomSource } from "./random-source";

/** A device that may be drawn; null where no batch is known. */
export interface DrawCandidate {
  serial: string;
  gaugeBatch: string | null;
  materialBatch: string | null;
}

export interface DrawRequest {
  /** Each serial once; the order does not matter. */
  devices: readonly DrawCandidate[];
  /** How many to draw, 1 … number of devices. */
  count: number;
  /** 128 bits drawn at random, as 32 hexadecimal digits; recorded with the draw, it repeats the draw. */
  seed: string;
}

/** The devices that share gauge batch and material batch. */
export interface DrawStratum {
  gaugeBatch: string | null;
  materialBatch: string | null;
  /** Devices that could be drawn. */
  devices: number;
  drawn: number;
}

export interface Draw {
  /** Rising. */
  serials: string[];
  /** By gauge batch, then material batch, unknown ones last. */
  strata: DrawStratum[];
  /** How the draw was made, for the record. */
  method: string;
}

/** Enters the record of a draw: raise the number with any change that gives other serials for the same request. */
const DRAW_METHOD = "balanced over gauge and material batches, xoshiro128**, draw 1";

interface Group extends DrawStratum {
  serials: string[];
}

function compare(a: string | null, b: string | null): number {
  if (a === b) return 0;
  if (a === null) return 1;
  if (b === null) return -1;
  return a < b ? -1 : 1;
}

function groupByBatches(devices: readonly DrawCandidate[]): Group[] {
  const groups = new Map<string, Group>();
  for (const { serial, gaugeBatch, materialBatch } of devices) {
    const key = JSON.stringify([gaugeBatch, materialBatch]);
    let group = groups.get(key);
    if (!group) {
      group = { gaugeBatch, materialBatch, devices: 0, drawn: 0, serials: [] };
      groups.set(key, group);
    }
    group.devices++;
    group.serials.push(serial);
  }
  for (const group of groups.values()) group.serials.sort(compare);
  return [...groups.values()].sort(
    (a, b) => compare(a.gaugeBatch, b.gaugeBatch) || compare(a.materialBatch, b.materialBatch),
  );
}

/** Draws `count` of the items, every choice being as likely as any other (Fisher and Yates, from the end). */
function choose<T>(items: readonly T[], count: number, random: RandomSource): T[] {
  const rest = [...items];
  const chosen: T[] = [];
  while (chosen.length < count) {
    const at = random.nextBelow(rest.length);
    chosen.push(rest[at] as T);
    rest[at] = rest.at(-1) as T;
    rest.pop();
  }
  return chosen;
}

/**
 * Gives strata too small for a share of one their one device, as far as the count reaches for all strata.
 * Without them the others' shares shrink, so it is repeated until nobody's share is below one.
 * @returns the strata that still share the rest in proportion, and that rest.
 */
function giveSmallOnes(groups: readonly Group[], count: number): { open: Group[]; rest: number } {
  let open = [...groups];
  let rest = count;
  if (count < groups.length) return { open, rest };
  for (;;) {
    const devices = open.reduce((sum, group) => sum + group.devices, 0);
    const small = open.filter((group) => rest * group.devices < devices);
    if (small.length === 0) return { open, rest };
    for (const group of small) group.drawn = 1;
    rest -= small.length;
    open = open.filter((group) => group.drawn === 0);
  }
}

/** Shares by the largest remainder, in whole numbers throughout; equal remainders take their turn by chance. */
function shareOut(groups: readonly Group[], count: number, random: RandomSource): void {
  const { open, rest } = giveSmallOnes(groups, count);
  const devices = open.reduce((sum, group) => sum + group.devices, 0);
  let left = rest;
  const remainders: { group: Group; remainder: number }[] = [];
  for (const group of choose(open, open.length, random)) {
    group.drawn = Math.floor((rest * group.devices) / devices);
    left -= group.drawn;
    remainders.push({ group, remainder: (rest * group.devices) % devices });
  }
  remainders.sort((a, b) => b.remainder - a.remainder);
  for (const { group } of remainders.slice(0, left)) group.drawn++;
}

function assertRequest({ devices, count }: DrawRequest): void {
  if (!(Number.isInteger(count) && count >= 1 && count <= devices.length))
    throw new AppError("draw.count_invalid", {
      count,
      devices: devices.length,
      message: `Draw between 1 and ${devices.length} devices: so many can be drawn.`,
    });
  const seen = new Set<string>();
  for (const { serial } of devices) {
    if (seen.has(serial)) throw new AppError("draw.serial_repeated", { serial });
    seen.add(serial);
  }
}

/**
 * Draws a sample at random, balanced over the batches: each pair of gauge batch and material batch gives its
 * proportional share by the method of the largest remainder, at least one device where the count reaches for all
 * pairs; inside a pair every choice is equally likely. Devices without known batches are a stratum like any other.
 * The same devices (in any order), count and seed give the same draw on every machine. The generator is
 * xoshiro128**, see {@link randomSource}.
 * @returns serials rising, and the strata with their counts.
 * @throws AppError `draw.count_invalid` {count, devices}, `draw.seed_invalid`, `draw.serial_repeated` {serial}.
 */
export function drawSample(request: DrawRequest): Draw {
  assertRequest(request);
  const random = randomSource(request.seed);
  const groups = groupByBatches(request.devices);
  shareOut(groups, request.count, random);
  const serials = groups.flatMap((group) => choose(group.serials, group.drawn, random)).sort(compare);
  const strata = groups.map(({ serials: _, ...stratum }) => stratum);
  return { serials, strata, method: DRAW_METHOD };
}
