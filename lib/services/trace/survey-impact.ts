import * as choices from "@/db/queries/impact-choices";
import { type ImpactSource, listImpact } from "@/db/queries/trace";
import { formatDateTime } from "@/lib/domain/format/time";
import { READERS } from "@/lib/domain/roles";
import { assertRole, type PersonCtx } from "@/lib/services/context";

export const IMPACT_KINDS = ["run", "derivation", "layout", "package", "equipment"] as const;
export type ImpactKind = (typeof IMPACT_KINDS)[number];

/** Things offered at once; older ones are reached from their own pages. */
const CHOICES_MAX = 300;
/** More than two lots of the largest size; what one thing reaches is counted up to here. */
const COUNTED_MAX = 150_000;

/** Things of a kind whose reach can be asked for, newest first, each as its address names it and in words. */
export async function listImpactChoices(ctx: PersonCtx, kind: ImpactKind): Promise<{ value: string; name: string }[]> {
  assertRole(ctx, ...READERS);
  const { db } = ctx;
  const words = (...parts: string[]) => parts.join(" · ").replaceAll("-", "\u2011");
  switch (kind) {
    case "run":
      return (await choices.listRunChoices(db, CHOICES_MAX)).map((row) => ({
        value: row.id,
        name: words(row.lot, `${row.purpose} run`, formatDateTime(row.createdAt), row.person),
      }));
    case "derivation":
      return (await choices.listDerivationChoices(db, CHOICES_MAX)).map((row) => ({
        value: row.id,
        name: words(row.lot, row.method, row.state, formatDateTime(row.createdAt), row.person),
      }));
    case "package":
      return (await choices.listPackageChoices(db, CHOICES_MAX)).map((row) => ({
        value: row.id,
        name: words(`${row.lot} ${row.version}`, row.state, formatDateTime(row.createdAt)),
      }));
    case "layout":
      return (await choices.listLayoutChoices(db, CHOICES_MAX)).map((row) => ({
        value: row.id,
        name: words(`${row.family} ${row.version}`, row.state),
      }));
    default:
      return (await choices.listEquipmentChoices(db, CHOICES_MAX)).map((row) => ({
        value: row.code,
        name: words(row.code, row.kind),
      }));
  }
}

export interface ImpactCounts {
  devices: number;
  lots: number;
  /** Carry, by record, an image that was reached. */
  carrying: number;
  /** Of those, have left the house. */
  carryingShipped: number;
  /** Were written, but what they carry is not known. */
  unknown: number;
  held: number;
  /** There are more than were counted. */
  more: boolean;
}

/** How many devices one thing reached, and where they stand now. The source is taken as {@link ImpactSource} names it. */
export async function countImpact(ctx: PersonCtx, source: ImpactSource): Promise<ImpactCounts> {
  assertRole(ctx, ...READERS);
  const rows = await listImpact(ctx.db, source, { limit: COUNTED_MAX + 1 });
  const carrying = rows.filter((row) => row.carriesReached);
  return {
    devices: Math.min(rows.length, COUNTED_MAX),
    lots: new Set(rows.map((row) => row.lot)).size,
    carrying: carrying.length,
    carryingShipped: carrying.filter((row) => row.shipped).length,
    unknown: rows.filter((row) => row.outcome !== null && row.carries === null).length,
    held: rows.filter((row) => row.held).length,
    more: rows.length > COUNTED_MAX,
  };
}
