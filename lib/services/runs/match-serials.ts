import type { Db } from "@/db/executor";
import { findDeviceIds, findLotsOfSerials } from "@/db/queries/devices";
import type { Reading } from "@/lib/domain/compensation/types";
import type { RowErrorList } from "@/lib/domain/readings/row-error-list";
import { forEachInSteps, type Steps } from "@/lib/domain/steps";
import { inSlices } from "@/lib/services/in-slices";

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
  const serials = await inSlices(serialsOf(readings));
  const deviceIds = await findDeviceIds(db, lot.id, serials);
  const strange = serials.filter((serial) => !deviceIds.has(serial));
  if (strange.length === 0) return { deviceIds, unknown: [] };
  const lots = await findLotsOfSerials(db, strange);
  // Between the two look-ups somebody may have added some to this very lot.
  const late = strange.filter((serial) => lots.get(serial) === lot.code);
  for (const [serial, id] of await findDeviceIds(db, lot.id, late)) deviceIds.set(serial, id);
  const judge = ({ row, serial }: Reading) => {
    if (deviceIds.has(serial)) return;
    const other = lots.get(serial);
    const at = { row, column: "serial" };
    if (other !== undefined) {
      errors.add({ ...at, code: "device.in_other_lot", message: `${serial} belongs to lot ${other}.` });
    } else if (!addDevices) {
      const message = `${serial} is not in lot ${lot.code}; add it to the lot, or upload with "add devices".`;
      errors.add({ ...at, code: "device.unknown", message });
    }
  };
  await inSlices(forEachInSteps(readings, judge));
  return { deviceIds, unknown: strange.filter((serial) => !lots.has(serial)) };
}

function* serialsOf(readings: readonly Reading[]): Steps<string[]> {
  const serials = new Set<string>();
  yield* forEachInSteps(readings, ({ serial }) => serials.add(serial));
  return [...serials];
}
