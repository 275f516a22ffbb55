import { listSets, type SetRole } from "@/db/queries/coefficients";
import { getDerivation } from "@/db/queries/derivations";
import type { FamilyRules } from "@/lib/domain/compensation/types";
import type { Ctx } from "@/lib/services/context";
import { getLotRules } from "@/lib/services/lots/lot-rules";
import type { DeviceDetail } from "./compute";

/** More than this no eye can tell apart in a chart. */
export const CHART_DEVICES_MAX = 400;

export interface ChartDevice {
  serial: string;
  role: SetRole;
  /** Of the device's own loaded points, 1/K. */
  gainTc: number | null;
  spanErrorPpm: number | null;
}

const LOADED: readonly SetRole[] = ["sample", "verification", "excluded"];

/**
 * What the charts of a derivation draw: the loaded devices of its runs, at most 400 of them by serial, and the values that
 * the envelope rests on. @throws AppError `derivation.not_found`
 */
export async function getDerivationChart(
  ctx: Ctx,
  id: string,
): Promise<{ rules: FamilyRules; devices: ChartDevice[] }> {
  const { rules } = await getLotRules(ctx.db, await getDerivation(ctx.db, id));
  const sets = await listSets(ctx.db, id, { roles: LOADED, limit: CHART_DEVICES_MAX });
  const devices = sets.map(({ serial, role, detail }) => {
    const { individual, spanErrorPpm } = detail as Partial<DeviceDetail>;
    return { serial, role, gainTc: individual?.gainTc ?? null, spanErrorPpm: spanErrorPpm ?? null };
  });
  return { rules, devices };
}
