import type { Db } from "@/db/executor";
import { listSetValues, type SetValuesRow } from "@/db/queries/coefficients";
import { type DerivationRow, getDerivation, listDerivationRunIds, listExclusions } from "@/db/queries/derivations";
import { listRunsById } from "@/db/queries/runs";
import { type CapacityEffect, capacityEffect, comparedRange } from "@/lib/domain/compensation/set-difference";
import type { Coefficients, FamilyRules } from "@/lib/domain/compensation/types";
import { STORED_UNITS } from "@/lib/domain/format/coefficient-units";
import { COEFFICIENT_QUANTITIES } from "@/lib/domain/format/quantity";
import { AppError } from "@/lib/errors";
import type { Ctx } from "@/lib/services/context";
import { getLotRules } from "@/lib/services/lots/lot-rules";
import { pageOf } from "@/lib/services/page";
import type {
  CompareDerivationsQuery,
  ComparedSet,
  ComparisonSide,
  DerivationComparison,
} from "@/schemas/api/derivation-comparison";

interface Difference {
  change: ComparedSet["change"] | "same";
  serial: string;
  from: SetValuesRow | undefined;
  to: SetValuesRow | undefined;
  effect: CapacityEffect | undefined;
}

const NO_FINDINGS = { hard: 0, soft: 0, note: 0 };

/**
 * What differs between two derivations of one lot: the facts of both, and device by device the coefficients with what the
 * difference does at capacity, largest first.
 * @throws AppError `derivation.not_found`, `derivation.running`, `derivation.other_lot`
 */
export async function compareDerivations(ctx: Ctx, query: CompareDerivationsQuery): Promise<DerivationComparison> {
  const [from, to] = await openSides(ctx, query);
  const { rules } = await getLotRules(ctx.db, to);
  const { range, proven } = comparedRange(rangeOf(from), rangeOf(to), rules);
  const all = await listDifferences(ctx.db, from, to, rules, range);
  const counts = { values: 0, added: 0, removed: 0, same: 0 };
  for (const { change } of all) counts[change]++;
  const listed = all
    .filter(({ change }) => (query.change ? change === query.change : change !== "same"))
    .sort(byWeight);
  const start = query.cursor ? listed.findIndex(({ serial }) => serial === query.cursor) + 1 : 0;
  const page = pageOf(listed.slice(start, start + query.limit + 1), query.limit, ({ serial }) => serial);
  const effects = all.flatMap(({ effect }) => (effect ? [effect.intervals] : []));
  return {
    lot: to.lotCode,
    from: await sideOf(ctx.db, from),
    to: await sideOf(ctx.db, to),
    rangeC: range,
    proven,
    counts,
    largestEffectV: effects.reduce<number | null>(
      (worst, one) => (worst === null || Math.abs(one) > Math.abs(worst) ? one : worst),
      null,
    ),
    items: page.items.map(viewOf),
    next: page.next,
  };
}

const rangeOf = ({ provenLowC, provenHighC }: DerivationRow): [number, number] | null =>
  provenLowC === null || provenHighC === null ? null : [provenLowC, provenHighC];

async function openSides(ctx: Ctx, query: CompareDerivationsQuery): Promise<[DerivationRow, DerivationRow]> {
  const from = await getDerivation(ctx.db, query.from);
  const to = await getDerivation(ctx.db, query.to);
  if (from.lotId !== to.lotId) {
    const message = `They belong to the lots ${from.lotCode} and ${to.lotCode}; choose two derivations of one lot.`;
    throw new AppError("derivation.other_lot", { from: from.lotCode, to: to.lotCode, message });
  }
  for (const { id, state } of [from, to]) {
    if (state !== "working" && state !== "failed") continue;
    const message =
      state === "working"
        ? "One of the two is still being computed; come back when it is done."
        : "One of the two has no result: it failed.";
    throw new AppError(state === "working" ? "derivation.running" : "derivation.wrong_state", {
      derivation: id,
      state,
      message,
    });
  }
  return [from, to];
}

async function listDifferences(
  db: Db,
  from: DerivationRow,
  to: DerivationRow,
  rules: FamilyRules,
  range: readonly [number, number],
): Promise<Difference[]> {
  const old = new Map((await listSetValues(db, from.id)).map((set) => [set.serial, set]));
  const now = new Map((await listSetValues(db, to.id)).map((set) => [set.serial, set]));
  const serials = new Set([...old.keys(), ...now.keys()]);
  return [...serials].map((serial) => differenceOf(serial, old.get(serial), now.get(serial), rules, range));
}

function differenceOf(
  serial: string,
  from: SetValuesRow | undefined,
  to: SetValuesRow | undefined,
  rules: FamilyRules,
  range: readonly [number, number],
): Difference {
  const [a, b] = [from?.coefficients ?? null, to?.coefficients ?? null];
  const both = { serial, from, to };
  if (!a && !b) return { ...both, change: "same", effect: undefined };
  if (!a || !b) return { ...both, change: a ? "removed" : "added", effect: undefined };
  const same = COEFFICIENT_QUANTITIES.every((name) => a[name] === b[name]);
  return { ...both, change: same ? "same" : "values", effect: same ? undefined : capacityEffect(a, b, rules, range) };
}

const RANK = { values: 0, added: 1, removed: 2, same: 3 };

function byWeight(a: Difference, b: Difference): number {
  const weight = ({ effect }: Difference) => (effect ? Math.abs(effect.intervals) : 0);
  return RANK[a.change] - RANK[b.change] || weight(b) - weight(a) || (a.serial < b.serial ? -1 : 1);
}

function viewOf({ serial, change, from, to, effect }: Difference): ComparedSet {
  const [a, b] = [from?.coefficients ?? null, to?.coefficients ?? null];
  const names = COEFFICIENT_QUANTITIES.filter((name) => coefficientOf(a, name) !== coefficientOf(b, name));
  return {
    serial,
    change: change as ComparedSet["change"],
    role: { from: from?.role ?? null, to: to?.role ?? null },
    coefficients: names.map((name) => {
      const [was, is] = [coefficientOf(a, name), coefficientOf(b, name)];
      return { name, from: was, to: is, step: was === null || is === null ? null : is - was, unit: STORED_UNITS[name] };
    }),
    effectV: effect?.intervals ?? null,
    effectAtC: effect?.atC ?? null,
  };
}

function coefficientOf(coefficients: Coefficients | null, name: keyof typeof STORED_UNITS): number | null {
  return coefficients?.[name] ?? null;
}

async function sideOf(db: Db, row: DerivationRow): Promise<ComparisonSide> {
  const runs = await listRunsById(db, await listDerivationRunIds(db, row.id));
  const exclude = await listExclusions(db, row.id);
  return {
    id: row.id,
    state: row.state,
    method: row.method,
    order: row.order,
    engine: row.engine,
    createdAt: row.createdAt.toISOString(),
    createdBy: row.createdByName,
    provenRange: rangeOf(row),
    pooled: row.pooled,
    devices: row.counts.devices ?? 0,
    withValues: row.counts.withValues ?? 0,
    findings: row.counts.findings ?? NO_FINDINGS,
    runs: runs.map(({ id, purpose, createdAt }) => ({ id, purpose, createdAt: createdAt.toISOString() })),
    exclude: exclude.map(({ serial, reason }) => ({ serial, reason })),
  };
}
