import { finish, forEachInSteps, type Steps } from "@/lib/domain/steps";
import type { Reading } from "./types";

/** The rows of one device by point, each in the order of the file. */
export type DeviceRows = Map<number, Reading[]>;

/** A lot's readings are grouped by several checks in turn; lists of readings never change. */
const known = new WeakMap<readonly Reading[], Map<string, DeviceRows>>();

/** Rows by device and point, in the order in which each is first met. Rows may come in any order. */
export function rowsByDevice(readings: readonly Reading[]): Map<string, DeviceRows> {
  return finish(rowsByDeviceInSteps(readings));
}

/** {@link rowsByDevice} for a process that serves others meanwhile. */
export function* rowsByDeviceInSteps(readings: readonly Reading[]): Steps<Map<string, DeviceRows>> {
  const earlier = known.get(readings);
  if (earlier) return earlier;
  const devices = new Map<string, DeviceRows>();
  let serial: string | undefined;
  let points: DeviceRows = new Map();
  yield* forEachInSteps(readings, (reading) => {
    // Rows of a device mostly follow one another.
    if (reading.serial !== serial) {
      serial = reading.serial;
      const found = devices.get(serial);
      points = found ?? new Map();
      if (!found) devices.set(serial, points);
    }
    const rows = points.get(reading.point);
    if (rows) rows.push(reading);
    else points.set(reading.point, [reading]);
  });
  known.set(readings, devices);
  return devices;
}
