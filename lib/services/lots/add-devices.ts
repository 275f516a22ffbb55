import { canonicalArraySha256 } from "@/builders/bundle/sha256";
import type { Trx } from "@/db/executor";
import {
  countDevices,
  type DeviceRow,
  findDevicesBySerial,
  insertBatchCorrections,
  insertDevices,
  updateBatches,
} from "@/db/queries/devices";
import { getLot, lockLot } from "@/db/queries/lots";
import { type BatchChange, type GivenDevice, listBatchChanges, mergeGivenDevices } from "@/lib/domain/batches";
import { mapInSteps } from "@/lib/domain/steps";
import { AppError } from "@/lib/errors";
import { assertRole, type PersonCtx } from "@/lib/services/context";
import { inSlices } from "@/lib/services/in-slices";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { LOT_DEVICES_MAX } from "@/schemas/api/lots";

export interface AddDevicesInput {
  lot: string;
  serials?: readonly string[];
  /** Serials with the batches of their gauges and material. */
  devices?: readonly GivenDevice[];
  /** Why batches that were told before are corrected. */
  reason?: string;
}

type Added = { added: number; known: number; batchesSet?: number };
type Change = BatchChange<DeviceRow>;

/**
 * Adds serials to a lot and says what devices are made of, all or none. A serial named twice counts once.
 * @returns how many are new, how many were in the lot before, and where batches were given, how many of those got some.
 * @throws AppError `lot.not_found`, `device.in_other_lot` {serials, lots, count}, `lot.too_many_devices` {devicesMax},
 * `device.batches_contradict` {serial}, `device.batch_differs` {serials, count} where a batch changes without a reason
 */
export async function addDevices(ctx: PersonCtx, input: AddDevicesInput): Promise<Added> {
  assertRole(ctx, "engineer");
  const plain = (input.serials ?? []).map((serial) => ({ serial }));
  const given = await inSlices(mergeGivenDevices([...plain, ...(input.devices ?? [])]));
  const serials = [...given.keys()].sort();
  return ctx.db.transaction().execute(async (trx) => {
    const lot = await lockLot(trx, (await getLot(trx, input.lot)).id);
    const found = await findDevicesBySerial(trx, serials);
    assertOfLot(found, lot.id);
    const known = new Set(await inSlices(mapInSteps(found, (device) => device.serial)));
    const added = serials.filter((serial) => !known.has(serial));
    if ((await countDevices(trx, lot.id)) + added.length > LOT_DEVICES_MAX) {
      const message = `A lot takes at most ${LOT_DEVICES_MAX.toLocaleString("en")} devices; make a second lot for the others.`;
      throw new AppError("lot.too_many_devices", { devicesMax: LOT_DEVICES_MAX, message });
    }
    const changes = await inSlices(listBatchChanges(found, given));
    assertReasonFor(changes, input.reason);
    const newDevice = (serial: string) => ({ ...(given.get(serial) as GivenDevice), id: ctx.newId() });
    const devices = await inSlices(mapInSteps(added, newDevice));
    await insertDevices(trx, { lotId: lot.id, devices, addedAt: ctx.now(), addedBy: ctx.actor.id });
    await changeBatches(ctx, trx, changes, input.reason);
    if (added.length > 0) await appendAdded(ctx, trx, lot.code, devices);
    if (changes.length > 0) await appendChanges(ctx, trx, lot.code, changes, input.reason);
    const counts = { added: added.length, known: known.size };
    return input.devices ? { ...counts, batchesSet: changes.length } : counts;
  });
}

/** Notes what was added. @param devices at least one. */
async function appendAdded(ctx: PersonCtx, trx: Trx, lot: string, devices: readonly GivenDevice[]): Promise<void> {
  const serials = devices.map((device) => device.serial);
  const withBatches = devices.filter((device) => device.gaugeBatch || device.materialBatch);
  const data = {
    added: serials.length,
    first: serials[0],
    last: serials.at(-1),
    serialsSha256: await inSlices(canonicalArraySha256(serials)),
    ...(withBatches.length > 0 && { batchesSha256: await batchesSha256(withBatches) }),
  };
  await appendEvent(ctx, trx, { action: "devices.added", subject: lot, data });
}

const batchesSha256 = async (devices: readonly GivenDevice[]): Promise<string> =>
  inSlices(canonicalArraySha256(await inSlices(mapInSteps(devices, batchesOf))));

const batchesOf = ({ serial, gaugeBatch = null, materialBatch = null }: GivenDevice) => ({
  serial,
  gaugeBatch,
  materialBatch,
});

function assertOfLot(found: Awaited<ReturnType<typeof findDevicesBySerial>>, lotId: string): void {
  const others = found.filter((device) => device.lotId !== lotId);
  const [first] = others;
  if (!first) return;
  const rest = others.length > 1 ? ` and ${others.length - 1} more are in other lots` : "";
  throw new AppError("device.in_other_lot", {
    serials: others.slice(0, 100).map((device) => ({ serial: device.serial, lot: device.lotCode })),
    count: others.length,
    message: `${first.serial} is in lot ${first.lotCode}${rest}. A serial belongs to one lot for ever; nothing was added.`,
  });
}

function assertReasonFor(changes: readonly Change[], reason: string | undefined): void {
  const corrected = changes.filter((change) => change.corrects);
  const [first] = corrected;
  if (!first || reason !== undefined) return;
  const { device } = first;
  const rest = corrected.length > 1 ? ` and ${corrected.length - 1} more` : "";
  throw new AppError("device.batch_differs", {
    serials: corrected.slice(0, 100).map((change) => change.device.serial),
    count: corrected.length,
    message:
      `${device.serial}${rest} stood with another batch (${[device.gaugeBatch, device.materialBatch].filter(Boolean).join(", ")}). ` +
      "Say why it is corrected; nothing was added.",
  });
}

async function changeBatches(ctx: PersonCtx, trx: Trx, changes: readonly Change[], reason = ""): Promise<void> {
  const rowOf = ({ device, gaugeBatch, materialBatch }: Change) => ({ id: device.id, gaugeBatch, materialBatch });
  const corrected = changes.filter((change) => change.corrects);
  const correctionOf = (change: Change) => ({ ...rowOf(change), correctionId: ctx.newId() });
  const corrections = await inSlices(mapInSteps(corrected, correctionOf));
  await insertBatchCorrections(trx, { devices: corrections, reason, personId: ctx.actor.id, at: ctx.now() });
  await updateBatches(trx, await inSlices(mapInSteps(changes, rowOf)));
}

async function appendChanges(
  ctx: PersonCtx,
  trx: Trx,
  lot: string,
  changes: readonly Change[],
  reason: string | undefined,
): Promise<void> {
  const corrected = changes.filter((change) => change.corrects).length;
  const changed = ({ device: { serial }, ...batches }: Change) => ({ ...batches, serial });
  const devices = await inSlices(mapInSteps(changes, changed));
  const data = { devices: devices.length, corrected, batchesSha256: await batchesSha256(devices) };
  await appendEvent(ctx, trx, { action: "devices.batches-set", subject: lot, data, texts: { reason } });
}
