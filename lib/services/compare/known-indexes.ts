import { pairingOf } from "@/builders/codec/layout-pairing";
import { type ComparisonIndex, ComparisonIndexer } from "@/lib/domain/comparison/comparison-index";
import type { Ctx } from "@/lib/services/context";
import { eachDifference, type TwoPackages } from "./two-packages";

interface Known {
  promise: Promise<ComparisonIndex>;
  /** Set once it is there. */
  index: ComparisonIndex | undefined;
}

/**
 * Indexes of late. Built packages never change, so that one stays right for good; 50,000 serials take a few megabytes,
 * so only some are kept.
 */
const known = new Map<string, Known>();
const KEPT = 8;

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
  const entry: Known = { promise: makeIndex(ctx, two), index: undefined };
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

async function makeIndex(ctx: Ctx, two: TwoPackages): Promise<ComparisonIndex> {
  const indexer = new ComparisonIndexer(pairingOf(two.from.layout, two.to.layout).versionNames);
  for await (const device of eachDifference(ctx, two)) indexer.add(device);
  return indexer.finish();
}
