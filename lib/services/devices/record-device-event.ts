import type { Trx } from "@/db/executor";
import {
  type DeviceChange,
  type DeviceEventKind,
  findHolder,
  insertDeviceEvent,
  lockDevice,
  updateDevice,
} from "@/db/queries/device-events";
import { AppError } from "@/lib/errors";
import { assertRole, type PersonCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { confirmIdentity } from "@/lib/services/people/confirm-identity";
import type { NewDeviceEventBody } from "@/schemas/api/devices";

const CHANGE: Record<DeviceEventKind, (event: NewDeviceEventBody) => DeviceChange> = {
  hold: () => ({ held: true }),
  resume: () => ({ held: false }),
  scrap: () => ({ scrapped: true }),
  rework: () => ({}),
  "board-replaced": (event) => ({ hardwareId: event.hardwareId }),
  firmware: (event) => ({ firmware: event.firmware }),
  shipped: () => ({ shipped: true }),
  returned: () => ({ shipped: false }),
};

/**
 * Records what happened to a device. Holding takes one person and is at once; going on takes another one.
 * @throws AppError `device.not_found`, `device.wrong_state`, `device.self_approval`, `auth.session_required`, `auth.password_wrong`
 */
export async function recordDeviceEvent(ctx: PersonCtx, input: { serial: string; event: NewDeviceEventBody }) {
  const { serial, event } = input;
  assertRole(ctx, "engineer", "service");
  if (event.kind === "hold" || event.kind === "resume") {
    if (ctx.actor.via !== "session")
      throw new AppError("auth.session_required", { message: "Holding and going on are signed in a browser." });
    await confirmIdentity(ctx, { password: event.password ?? "", oneTimeCode: event.oneTimeCode });
  }
  return ctx.db.transaction().execute(async (trx) => {
    const device = await lockDevice(trx, serial);
    assertPossible(device, event.kind);
    if (event.kind === "resume") await assertSecondPerson(ctx, trx, device);
    const id = ctx.newId();
    const { kind, reason } = event;
    const facts = {
      reference: event.reference ?? null,
      hardwareId: event.hardwareId ?? null,
      firmware: event.firmware ?? null,
    };
    await insertDeviceEvent(trx, {
      id,
      deviceId: device.id,
      kind,
      reason,
      ...facts,
      personId: ctx.actor.id,
      at: ctx.now(),
    });
    await updateDevice(trx, device.id, CHANGE[kind](event));
    await appendEvent(ctx, trx, {
      action: `device.${kind}`,
      subject: serial,
      data: { event: id, ...facts },
      texts: { reason },
    });
    return { id, serial, kind, at: ctx.now().toISOString() };
  });
}

/** Going on after a hold is another person's to say; the database refuses it too. @throws AppError `device.self_approval` */
async function assertSecondPerson(ctx: PersonCtx, trx: Trx, device: { id: string; serial: string }): Promise<void> {
  if ((await findHolder(trx, device.id)) !== ctx.actor.id) return;
  throw new AppError("device.self_approval", {
    serial: device.serial,
    message: `You held ${device.serial}; a second person has to say that it may go on.`,
  });
}

/** What can't be: scrapping twice, holding what is held. @throws AppError `device.wrong_state` */
function assertPossible(
  device: { serial: string; held: boolean; scrapped: boolean; shipped: boolean },
  kind: DeviceEventKind,
): void {
  const wrong = (message: string) => new AppError("device.wrong_state", { serial: device.serial, message });
  if (device.scrapped) throw wrong(`${device.serial} is scrapped; nothing more can happen to it.`);
  if (kind === "hold" && device.held) throw wrong(`${device.serial} is held already.`);
  if (kind === "resume" && !device.held) throw wrong(`${device.serial} is not held.`);
  if (kind === "shipped" && device.held) throw wrong(`${device.serial} is held and must not be shipped.`);
  if (kind === "shipped" && device.shipped) throw wrong(`${device.serial} was shipped already.`);
  if (kind === "returned" && !device.shipped) throw wrong(`${device.serial} was not shipped.`);
}
