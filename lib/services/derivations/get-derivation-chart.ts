import { listSets, type SetRole, type SetRow } from "@/db/queries/coefficients";
import { getDerivation } from "@/db/queries/derivations";
import { eachDriftPoints } from "@/db/queries/drift-points";
import { type DriftRange, DriftRangeGatherer } from "@/lib/domain/compensation/drift-range";
import { type DriftCurves, driftCurves } from "@/lib/domain/compensation/predict";
import type { DeviceResiduals, FamilyRules } from "@/lib/domain/compensation/types";
import type { Ctx } from "@/lib/services/context";
import { getLotRules } from "@/lib/services/lots/lot-rules";
import type { DeviceDetail } from "./compute";

/** More than this no eye can tell apart in a chart. */
export const CHART_DEVICES_MAX = 200;

/** A device that is drawn by itself: it was loaded, in a sample or verification run. */
export interface ChartDevice {
  serial: string;
  role: SetRole;
  /** Of the device's own loaded points, 1/K. */
  gainTc: number | null;
  /** Of its set. */
  gain: number | null;
  spanErrorPpm: number | null;
  /** Null without coefficients. */
  curves: DriftCurves | null;
  residuals: DeviceResiduals | null;
  /** Points less coefficients, of zero and of gain: 0 means that the fit passes through all points. */
  freedom: { zero: number; gain: number; temperature: number };
}

/** The other devices, of which only the range is drawn. */
export interface GatheredDrift {
  devices: number;
  /** Devices read at another number of points than the rest; they are not in the range. */
  others: number;
  zeroIntervals: DriftRange[];
}

export interface DerivationChart {
  rules: FamilyRules;
  devices: ChartDevice[];
  /** How many could be drawn by themselves. */
  loaded: number;
  /** Null where there is no other device. */
  gathered: GatheredDrift | null;
}

const LOADED: readonly SetRole[] = ["sample", "verification", "excluded"];

/**
 * What the charts of a derivation draw: loaded devices one by one, at most 200 of them by serial, the range of all others, and
 * the values that the envelope rests on. @throws AppError `derivation.not_found`
 */
export async function getDerivationChart(ctx: Ctx, id: string): Promise<DerivationChart> {
  const derivation = await getDerivation(ctx.db, id);
  const { rules } = await getLotRules(ctx.db, derivation);
  const sets = await listSets(ctx.db, id, { roles: LOADED, limit: CHART_DEVICES_MAX });
  const { roles = {} } = derivation.counts;
  const loaded = LOADED.reduce((sum, role) => sum + (roles[role] ?? 0), 0);
  const drawn = sets.map(({ serial }) => serial);
  const gathered = derivation.finishedAt === null ? null : await gatheredOf(ctx, id, drawn, rules);
  return { rules, devices: sets.map((set) => chartDevice(set, rules)), loaded, gathered };
}

function chartDevice({ serial, role, coefficients, detail }: SetRow, rules: FamilyRules): ChartDevice {
  const { individual, spanErrorPpm, points = [], residuals, uncertainty } = detail as Partial<DeviceDetail>;
  return {
    serial,
    role,
    gainTc: individual?.gainTc ?? null,
    gain: coefficients?.gain ?? null,
    spanErrorPpm: spanErrorPpm ?? null,
    curves: coefficients && points.length > 0 ? driftCurves(points, coefficients, rules) : null,
    residuals: coefficients ? (residuals ?? null) : null,
    freedom: {
      zero: uncertainty?.degreesOfFreedomZero ?? 0,
      gain: uncertainty?.degreesOfFreedomGain ?? 0,
      temperature: uncertainty?.degreesOfFreedomTemperature ?? 0,
    },
  };
}

/** Ranges of late. A finished derivation never changes, so that one stays right for good. */
const ranges = new Map<string, Promise<GatheredDrift | null>>();
const RANGES_KEPT = 64;

function gatheredOf(ctx: Ctx, id: string, drawn: string[], rules: FamilyRules): Promise<GatheredDrift | null> {
  const known = ranges.get(id);
  if (known) return known;
  const gathering = gather(ctx, id, drawn, rules);
  ranges.set(id, gathering);
  gathering.catch(() => ranges.delete(id));
  const [oldest] = ranges.keys();
  if (ranges.size > RANGES_KEPT && oldest !== undefined) ranges.delete(oldest);
  return gathering;
}

async function gather(ctx: Ctx, id: string, drawn: string[], rules: FamilyRules): Promise<GatheredDrift | null> {
  const range = new DriftRangeGatherer();
  for await (const page of eachDriftPoints(ctx.db, id, drawn))
    for (const { coefficients, points } of page) range.add(driftCurves(points, coefficients, rules).zeroIntervals);
  return range.devices > 0 ? { devices: range.devices, others: range.others, zeroIntervals: range.finish() } : null;
}
