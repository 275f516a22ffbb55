import { sha256Hex } from "@/builders/bundle/sha256";
import { countDevices, findDevicesBySerial, insertDevices } from "@/db/queries/devices";
import { getLot, lockLot } from "@/db/queries/lots";
import { canonicalJson } from "@/lib/domain/canonical-json";
import { AppError } from "@/lib/errors";
import { assertRole, type PersonCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { LOT_DEVICES_MAX } from "@/schemas/api/lots";

/**
 * Adds serials to a lot, all or none. A serial named twice counts once.
 * @returns how many are new and how many were in the lot before.
 * @throws AppError `lot.not_found`, `device.in_other_lot` {serials, lots, count}, `lot.too_many_devices` {devicesMax}
 */
export async function addDevices(
  ctx: PersonCtx,
  input: { lot: string; serials: readonly string[] },
): Promise<{ added: number; known: number }> {
  assertRole(ctx, "engineer");
  const serials = [...new Set(input.serials)].sort();
  return ctx.db.transaction().execute(async (trx) => {
    const lot = await lockLot(trx, (await getLot(trx, input.lot)).id);
    const found = await findDevicesBySerial(trx, serials);
    assertOfLot(found, lot.id);
    const known = new Set(found.map((device) => device.serial));
    const added = serials.filter((serial) => !known.has(serial));
    if ((await countDevices(trx, lot.id)) + added.length > LOT_DEVICES_MAX) {
      const message = `A lot takes at most ${LOT_DEVICES_MAX.toLocaleString("en")} devices; make a second lot for the others.`;
      throw new AppError("lot.too_many_devices", { devicesMax: LOT_DEVICES_MAX, message });
    }
    if (added.length > 0) {
      const devices = added.map((serial) => ({ id: ctx.newId(), serial }));
      await insertDevices(trx, { lotId: lot.id, devices, addedAt: ctx.now(), addedBy: ctx.actor.id });
      const data = {
        added: added.length,
        first: added[0],
        last: added.at(-1),
        serialsSha256: sha256Hex(canonicalJson(added)),
      };
      await appendEvent(ctx, trx, { action: "devices.added", subject: lot.code, data });
    }
    return { added: added.length, known: known.size };
  });
}

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
