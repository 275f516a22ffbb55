import type { Purpose } from "@/lib/domain/compensation/types";
import type { FamilyDocument } from "@/schemas/api/families";
import { type DriftParameters, type ModelDevice, signalMvV, thermometerCounts } from "./device-model";
import type { Random } from "./random";

export interface RunPlan {
  purpose: Exclude<Purpose, "proof">;
  devices: readonly ModelDevice[];
  /** Chamber temperatures in °C, in the order they were driven to. */
  temperaturesC: readonly number[];
  startedAt: Date;
  /** Minutes at temperature before the first row. */
  soakMinutes?: number;
}

const HEADER = "serial,point,chamber_c,soak_min,device_temp,load_kg,signal_mv_v,taken_at";
const REPEATS = 2;
const MINUTES_BETWEEN_ROWS = 6;
const MINUTES_BETWEEN_POINTS = 190;

/** A run's readings as the reader's program would have written them: CSV, one row a measurement. */
export function writeRunCsv(
  plan: RunPlan,
  { family, parameters, random }: { family: FamilyDocument; parameters: DriftParameters; random: Random },
): Buffer {
  const lines = [HEADER];
  const loads = plan.purpose === "zero" ? [0] : [0, 0.6 * family.capacityKg];
  const soakFrom = plan.soakMinutes ?? family.minSoakMinutes + 6;
  for (const device of plan.devices) {
    plan.temperaturesC.forEach((targetC, index) => {
      const chamberC = random.normal(targetC, 0.06);
      for (let row = 0; row < REPEATS * loads.length; row++) {
        const loadKg = loads[row % loads.length] ?? 0;
        const trueC = random.normal(chamberC, 0.008);
        const soakMinutes = soakFrom + row * MINUTES_BETWEEN_ROWS;
        const minutes = index * MINUTES_BETWEEN_POINTS + soakMinutes;
        const takenAt = new Date(plan.startedAt.getTime() + minutes * 60_000);
        lines.push(
          [
            device.serial,
            index + 1,
            trueC.toFixed(3),
            soakMinutes,
            random.normal(thermometerCounts(device, trueC), parameters.noiseCounts).toFixed(2),
            loadKg,
            random.normal(signalMvV(device, family, trueC, loadKg), parameters.noiseMvV).toFixed(7),
            takenAt.toISOString().replace(".000Z", "Z"),
          ].join(","),
        );
      }
    });
  }
  return Buffer.from(`${lines.join("\n")}\n`);
}
