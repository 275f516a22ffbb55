import { forEachInSteps, type Steps } from "@/lib/domain/steps";
import { AppError } from "@/lib/errors";

/** A device with what it is made of, as somebody told it; absent and null both mean that nobody said. */
export interface GivenDevice {
  serial: string;
  gaugeBatch?: string | null;
  materialBatch?: string | null;
}

/** What a device is made of, as it stands. */
export interface KnownBatches {
  gaugeBatch: string | null;
  materialBatch: string | null;
}

/** A device whose batches change: both as they are then, and whether one that stood there was another. */
export interface BatchChange<T> extends KnownBatches {
  device: T;
  corrects: boolean;
}

/**
 * Devices by serial, each once, whatever was told of it put together.
 * @throws AppError `device.batches_contradict` {serial} where two entries of one serial name different batches
 */
export function* mergeGivenDevices(given: Iterable<GivenDevice>): Steps<Map<string, Required<GivenDevice>>> {
  const devices = new Map<string, Required<GivenDevice>>();
  yield* forEachInSteps(given, ({ serial, gaugeBatch = null, materialBatch = null }) => {
    const earlier = devices.get(serial);
    devices.set(serial, {
      serial,
      gaugeBatch: merged(serial, earlier?.gaugeBatch, gaugeBatch),
      materialBatch: merged(serial, earlier?.materialBatch, materialBatch),
    });
  });
  return devices;
}

function merged(serial: string, earlier: string | null | undefined, given: string | null): string | null {
  if (earlier && given && earlier !== given) {
    const message = `${serial} is named twice, with batch ${earlier} and with batch ${given}; leave one of them.`;
    throw new AppError("device.batches_contradict", { serial, message });
  }
  return given ?? earlier ?? null;
}

/** What changes of devices that are known; what nobody says anything of stays. */
export function* listBatchChanges<T extends KnownBatches & { serial: string }>(
  known: readonly T[],
  given: ReadonlyMap<string, GivenDevice>,
): Steps<BatchChange<T>[]> {
  const changes: BatchChange<T>[] = [];
  yield* forEachInSteps(known, (device) => {
    const told = given.get(device.serial);
    const gaugeBatch = told?.gaugeBatch ?? device.gaugeBatch;
    const materialBatch = told?.materialBatch ?? device.materialBatch;
    if (gaugeBatch === device.gaugeBatch && materialBatch === device.materialBatch) return;
    const corrects =
      (device.gaugeBatch !== null && gaugeBatch !== device.gaugeBatch) ||
      (device.materialBatch !== null && materialBatch !== device.materialBatch);
    changes.push({ device, gaugeBatch, materialBatch, corrects });
  });
  return changes;
}
