import { getSet } from "@/db/queries/coefficients";
import { type DeviceReadingRow, findNeighbours, listReadingsOfSet } from "@/db/queries/derivation-device";
import { getDerivation } from "@/db/queries/derivations";
import { findZero } from "@/lib/domain/compensation/individual";
import { distanceK } from "@/lib/domain/compensation/predict";
import type { Ctx } from "@/lib/services/context";
import { getLotRules } from "@/lib/services/lots/lot-rules";
import type { DeviceDetail } from "./compute";

/** How two fitted values hang together. */
export interface Covariance {
  /** mV/V · mV/V/K */
  covariance: number;
  /** −1 … 1 */
  correlation: number;
}

export interface DeviceEvidence {
  readings: (Omit<DeviceReadingRow, "takenAt"> & { takenAt: string })[];
  /** Of zero and zeroTc; null without a degree of freedom. */
  zeroCovariance: Covariance | null;
  previous: string | null;
  next: string | null;
}

/**
 * What one device's coefficients rest on: its readings in the runs of the derivation, how zero and zeroTc hang together, and
 * the devices before and after it. @throws AppError `derivation.not_found`, `coefficients.not_found`
 */
export async function getDeviceEvidence(ctx: Ctx, id: string, serial: string): Promise<DeviceEvidence> {
  const derivation = await getDerivation(ctx.db, id);
  const set = await getSet(ctx.db, id, serial);
  const { rules } = await getLotRules(ctx.db, derivation);
  const readings = await listReadingsOfSet(ctx.db, id, serial);
  const { points = [] } = set.detail as Partial<DeviceDetail>;
  const home = points.filter((point) => point.purpose === points[0]?.purpose);
  const { coefficients } = set;
  const fit =
    coefficients && home.length > 0
      ? findZero(
          derivation.order,
          home.map((point) => distanceK(coefficients, point.deviceTemp, rules.referenceC)),
          home,
        )
      : undefined;
  return {
    readings: readings.map(({ takenAt, ...reading }) => ({ ...reading, takenAt: takenAt.toISOString() })),
    zeroCovariance: covarianceOf(fit?.covariance ?? null),
    ...(await findNeighbours(ctx.db, id, serial)),
  };
}

function covarianceOf(matrix: number[][] | null): Covariance | null {
  const [v00, v01, v11] = [matrix?.[0]?.[0], matrix?.[0]?.[1], matrix?.[1]?.[1]];
  if (v00 === undefined || v01 === undefined || v11 === undefined || !(v00 * v11 > 0)) return null;
  return { covariance: v01, correlation: v01 / Math.sqrt(v00 * v11) };
}
