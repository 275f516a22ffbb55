import type { Db } from "@/db/executor";
import { findDeviceIds, findLotsOfSerials } from "@/db/queries/devices";
import type { Reading } from "@/lib/domain/compensation/types";
import type { RowErrorList } from "@/lib/domain/readings/row-error-list";

export interface MatchedSerials {
  /** Device id by serial, of those that the lot has. */
  deviceIds: Map<string, string>;
  /** Serials that no lot has, in the order of the file. */
  unknown: string[];
}

/**
 * Matches a run's serials with the lot's devices. Every row of a serial that belongs to another lot is an error, and every
 * row of an unknown one unless devices are to be added.
 */
export async function matchSerials(
  db: Db,
  lot: { id: string; code: string },
  readings: readonly Reading[],
  addDevices: boolean,
  errors: RowErrorList,
): Promise<MatchedSerials> {
  const serials = [...new Set(readings.map((reading) => reading.serial))];
  const deviceIds = await findDeviceIds(db, lot.id, serials);
  const strange = serials.filter((serial) => !deviceIds.has(serial));
  const lots = await findLotsOfSerials(db, strange);
  if (strange.length === 0) return { deviceIds, unknown: [] };
  for (const { row, serial } of readings) {
    if (deviceIds.has(serial)) continue;
    const other = lots.get(serial);
    const at = { row, column: "serial" };
    if (other !== undefined) {
      errors.add({ ...at, code: "device.in_other_lot", message: `${serial} belongs to lot ${other}.` });
    } else if (!addDevices) {
      const message = `${serial} is not in lot ${lot.code}; add it to the lot, or upload with "add devices".`;
      errors.add({ ...at, code: "device.unknown", message });
    }
  }
  return { deviceIds, unknown: strange.filter((serial) => !lots.has(serial)) };
}
