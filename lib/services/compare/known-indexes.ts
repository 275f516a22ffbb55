import { pairingOf } from "@/builders/codec/layout-pairing";
import { type ComparisonIndex, ComparisonIndexer } from "@/lib/domain/comparison/comparison-index";
import { type SerialSelection, selectSerials } from "@/lib/domain/comparison/select-serials";
import type { Ctx } from "@/lib/services/context";
import { eachDifference, type TwoPackages } from "./two-packages";

interface Known {
  promise: Promise<ComparisonIndex>;
  /** Set once it is there. */
  index: ComparisonIndex | undefined;
  /** Places selected of late, by the selection: a reader scrolls through one. */
  selected: Map<string, readonly number[]>;
}

/**
 * Indexes of late. Built packages never change, so that one stays right for good; 50,000 serials take a few megabytes,
 * so only some are kept.
 */
const known = new Map<string, Known>();
const KEPT = 8;
const SELECTIONS_KEPT = 8;

const keyOf = ({ from, to }: TwoPackages) => `${from.pkg.id} ${to.pkg.id}`;

/** The index of a comparison, if it was made already; asks for none. */
export function findIndex(two: TwoPackages): ComparisonIndex | undefined {
  return known.get(keyOf(two))?.index;
}

/** The index of a comparison, made once however often it is asked for. */
export function indexOf(ctx: Ctx, two: TwoPackages): Promise<ComparisonIndex> {
  const key = keyOf(two);
  const found = known.get(key);
  if (found) return found.promise;
  const entry: Known = { promise: makeIndex(ctx, two), index: undefined, selected: new Map() };
  known.set(key, entry);
  entry.promise.then(
    (index) => {
      entry.index = index;
    },
    () => known.delete(key),
  );
  const [oldest] = known.keys();
  if (known.size > KEPT && oldest !== undefined) known.delete(oldest);
  return entry.promise;
}

/** The serials selected of a comparison, as places in its index. */
export async function selectedOf(ctx: Ctx, two: TwoPackages, selection: SerialSelection): Promise<readonly number[]> {
  const index = await indexOf(ctx, two);
  const selected = known.get(keyOf(two))?.selected;
  const key = JSON.stringify(selection);
  const places = selected?.get(key) ?? selectSerials(index, selection);
  selected?.set(key, places);
  const [oldest] = selected?.keys() ?? [];
  if (selected && selected.size > SELECTIONS_KEPT && oldest !== undefined) selected.delete(oldest);
  return places;
}

async function makeIndex(ctx: Ctx, two: TwoPackages): Promise<ComparisonIndex> {
  const indexer = new ComparisonIndexer(pairingOf(two.from.layout, two.to.layout).versionNames);
  for await (const device of eachDifference(ctx, two)) indexer.add(device);
  return indexer.finish();
}
