import { type ComparisonIndex, extremesOf } from "@/lib/domain/comparison/comparison-index";
import { stepHistogram } from "@/lib/domain/comparison/step-histogram";
import type { Ctx } from "@/lib/services/context";
import { pageOf } from "@/lib/services/page";
import type { ComparedDevice, CompareQuery, Comparison, ComparisonOverview, FieldSummary } from "@/schemas/api/compare";
import { indexOf } from "./known-indexes";
import { comparedPackage, type DeviceDifference, eachDifference, openTwoPackages } from "./two-packages";

/**
 * What differs between two packages of whatever lots, by serial: one page of the serials that differ, and counts over all.
 * @throws AppError `package.not_found`, `package.not_built`
 */
export async function comparePackages(ctx: Ctx, query: CompareQuery): Promise<Comparison> {
  const two = await openTwoPackages(ctx, query.from, query.to);
  const index = await indexOf(ctx, two);
  const found: ComparedDevice[] = [];
  for await (const device of eachDifference(ctx, two, { after: query.cursor })) {
    if (!isWanted(device, query)) continue;
    found.push(device);
    if (found.length > query.limit) break;
  }
  const page = pageOf(found, query.limit, (device) => device.serial);
  const { counts } = index;
  return { from: comparedPackage(two.from), to: comparedPackage(two.to), counts, fields: summaryOf(index), ...page };
}

/**
 * Two packages and what differs between them, in figures over all serials.
 * @throws AppError `package.not_found`, `package.not_built`
 */
export async function getComparisonOverview(ctx: Ctx, ids: { from: string; to: string }): Promise<ComparisonOverview> {
  const two = await openTwoPackages(ctx, ids.from, ids.to);
  const index = await indexOf(ctx, two);
  const byName = new Map(index.fields.map((field) => [field.name, field]));
  const fields = summaryOf(index).map((summary) => {
    const field = byName.get(summary.name);
    return { ...summary, parameter: field?.parameter ?? true, histogram: field ? stepHistogram(field) : null };
  });
  return { from: comparedPackage(two.from), to: comparedPackage(two.to), counts: index.counts, fields };
}

/** Fields that changed in a serial which both hold, in the order in which they turned up. */
function summaryOf({ fields }: ComparisonIndex): FieldSummary[] {
  return fields.map(({ name, unit, devices, hasSteps, steps }) => {
    const extremes = hasSteps ? extremesOf(steps) : undefined;
    return { name, unit, devices, stepsMin: extremes?.min ?? null, stepsMax: extremes?.max ?? null };
  });
}

function isWanted(device: DeviceDifference, { change, search }: CompareQuery): device is ComparedDevice {
  if (device.change === "same" || (change !== undefined && device.change !== change)) return false;
  return search === undefined || device.serial.includes(search.toUpperCase());
}
