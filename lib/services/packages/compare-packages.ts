import type { CompiledLayout } from "@/builders/codec/compile-layout";
import { compareImages } from "@/builders/codec/difference";
import { decodeImage } from "@/builders/codec/image";
import type { ImageBytesRow } from "@/db/queries/images";
import type { PackageRow } from "@/db/queries/packages";
import type { Ctx } from "@/lib/services/context";
import { layoutsOfPackages } from "@/lib/services/devices/layouts-of-packages";
import { pageOf } from "@/lib/services/page";
import type { ComparedDevice, CompareQuery, Comparison } from "@/schemas/api/compare";
import { type ComparisonOverview, OverviewCounter } from "./comparison-overview";
import { type PairedImages, pairImages } from "./paired-images";
import { getBuiltPackage } from "./read-images";

interface Side {
  pkg: PackageRow;
  layout: CompiledLayout;
}

type Device = Omit<ComparedDevice, "change"> & { change: ComparedDevice["change"] | "same" };

/**
 * What differs between two packages of whatever lots, by serial: one page of the serials that differ, and counts over all.
 * @throws AppError `package.not_found`, `package.not_built`
 */
export async function comparePackages(ctx: Ctx, query: CompareQuery): Promise<Comparison> {
  const [from, to] = await openSides(ctx, query.from, query.to);
  const overview = await overviewOf(ctx, from, to);
  const found: ComparedDevice[] = [];
  for await (const device of eachDevice(ctx, from, to, query.cursor)) {
    if (!isWanted(device, query)) continue;
    found.push(device);
    if (found.length > query.limit) break;
  }
  const page = pageOf(found, query.limit, (device) => device.serial);
  return { from: viewOf(from.pkg), to: viewOf(to.pkg), ...overview, ...page };
}

async function openSides(ctx: Ctx, fromId: string, toId: string): Promise<[Side, Side]> {
  const packages = [await getBuiltPackage(ctx, fromId), await getBuiltPackage(ctx, toId)];
  const layouts = await layoutsOfPackages(ctx.db, [fromId, toId]);
  return packages.map((pkg) => ({ pkg, layout: layouts.get(pkg.id) })) as [Side, Side];
}

/** Overviews of late; built packages never change, so that one stays right for good. */
const overviews = new Map<string, Promise<ComparisonOverview>>();
const OVERVIEWS_KEPT = 64;

/** Counts over all serials, worked out once however many pages are asked for. */
function overviewOf(ctx: Ctx, from: Side, to: Side): Promise<ComparisonOverview> {
  const key = `${from.pkg.id} ${to.pkg.id}`;
  const known = overviews.get(key);
  if (known) return known;
  const counting = countDifferences(ctx, from, to);
  overviews.set(key, counting);
  counting.catch(() => overviews.delete(key));
  const [oldest] = overviews.keys();
  if (overviews.size > OVERVIEWS_KEPT && oldest !== undefined) overviews.delete(oldest);
  return counting;
}

async function countDifferences(ctx: Ctx, from: Side, to: Side): Promise<ComparisonOverview> {
  const counter = new OverviewCounter();
  for await (const device of eachDevice(ctx, from, to)) counter.add(device);
  return counter.finish();
}

async function* eachDevice(ctx: Ctx, from: Side, to: Side, after?: string): AsyncGenerator<Device> {
  for await (const pair of pairImages(ctx.db, from.pkg.id, to.pkg.id, after)) yield compareDevice(from, to, pair);
}

function compareDevice(from: Side, to: Side, pair: PairedImages): Device {
  const { serial } = pair;
  if (!pair.from) return { serial, change: "added", fields: fieldsOf(to, pair.to as ImageBytesRow, "to"), bytes: [] };
  if (!pair.to) return { serial, change: "removed", fields: fieldsOf(from, pair.from, "from"), bytes: [] };
  const older = { layout: from.layout, bytes: pair.from.bytes };
  return { serial, ...compareImages(older, { layout: to.layout, bytes: pair.to.bytes }) };
}

/** All fields of an image whose serial the other package lacks. */
function fieldsOf({ layout }: Side, image: ImageBytesRow, side: "from" | "to"): ComparedDevice["fields"] {
  const none = { from: null, to: null, steps: null };
  return decodeImage(layout, image.bytes).map(({ name, unit, value }) => ({ name, unit, ...none, [side]: value }));
}

function isWanted(device: Device, { change, search }: CompareQuery): device is ComparedDevice {
  if (device.change === "same" || (change !== undefined && device.change !== change)) return false;
  return search === undefined || device.serial.includes(search.toUpperCase());
}

function viewOf({ id, lotCode, familyCode, version, layoutVersion, state, digest }: PackageRow): Comparison["from"] {
  return {
    id,
    lot: lotCode,
    family: familyCode,
    version,
    layout: layoutVersion,
    state,
    digest: digest?.toString("hex") ?? null,
  };
}
