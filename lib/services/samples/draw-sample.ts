import { randomBytes } from "node:crypto";
import { getLot, lockLot } from "@/db/queries/lots";
import {
  type DrawableDeviceRow,
  insertSampleDraw,
  type LeftOut,
  type ListedSampleDrawRow,
  listDrawableDevices,
  listSampleDraws as listRows,
  type SampleDrawRow,
} from "@/db/queries/sample-draws";
import { drawSample as draw } from "@/lib/domain/compensation/draw-sample";
import { AppError } from "@/lib/errors";
import { assertRole, type Ctx, type PersonCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { type Page, pageOf } from "@/lib/services/page";
import { LEFT_OUT_REASONS, type LeftOutReason, type SampleDrawView } from "@/schemas/api/sample-draws";

const LEFT_OUT_NAMED_MAX = 100;

/**
 * Draws a lot's sample at random and records it: seed, what could be drawn, what was left out and why.
 * @throws AppError `lot.not_found`, `draw.too_few` {count, eligible}
 */
export async function drawSample(
  ctx: PersonCtx,
  input: { lot: string; count: number; seed?: string },
): Promise<SampleDrawView> {
  assertRole(ctx, "engineer");
  return ctx.db.transaction().execute(async (trx) => {
    const lot = await lockLot(trx, (await getLot(trx, input.lot)).id);
    const devices = await listDrawableDevices(trx, lot.id);
    const eligible = devices.filter((device) => reasonOf(device) === undefined);
    assertEnough(input.count, eligible.length, devices.length);
    const seed = input.seed ?? randomBytes(16).toString("hex");
    const drawn = draw({ devices: eligible, count: input.count, seed });
    const row: SampleDrawRow = {
      ...drawn,
      id: ctx.newId(),
      lotId: lot.id,
      seed,
      count: input.count,
      eligible: eligible.length,
      leftOut: leftOutOf(devices),
      createdAt: ctx.now(),
      createdBy: ctx.actor.id,
    };
    await insertSampleDraw(trx, row);
    const { id, count, serials, method } = row;
    const data = { draw: id, seed, count, eligible: eligible.length, serials, method };
    await appendEvent(ctx, trx, { action: "sample.drawn", subject: lot.code, data });
    return viewOf({ ...row, createdByName: ctx.actor.name }, lot.code);
  });
}

/** A lot's draws, newest first. @throws AppError `lot.not_found` */
export async function listSampleDraws(
  ctx: Ctx,
  input: { lot: string; limit: number; cursor?: string },
): Promise<Page<SampleDrawView>> {
  const lot = await getLot(ctx.db, input.lot);
  const rows = await listRows(ctx.db, lot.id, { before: input.cursor, limit: input.limit + 1 });
  return pageOf(
    rows.map((row) => viewOf(row, lot.code)),
    input.limit,
    (row) => row.id,
  );
}

/** What speaks first against drawing a device. */
function reasonOf(device: DrawableDeviceRow): LeftOutReason | undefined {
  return LEFT_OUT_REASONS.find((reason) => device[reason]);
}

function leftOutOf(devices: readonly DrawableDeviceRow[]): LeftOut[] {
  return LEFT_OUT_REASONS.map((reason) => {
    const serials = devices.filter((device) => reasonOf(device) === reason).map((device) => device.serial);
    return { reason, count: serials.length, serials: serials.slice(0, LEFT_OUT_NAMED_MAX) };
  }).filter(({ count }) => count > 0);
}

function assertEnough(count: number, eligible: number, devices: number): void {
  if (count <= eligible) return;
  const why =
    devices === eligible
      ? `the lot has ${devices}`
      : `${eligible} of the lot's ${devices} can be drawn; the others are held, scrapped, shipped, measured or planned`;
  throw new AppError("draw.too_few", { count, eligible, message: `${count} were asked for, but ${why}.` });
}

function viewOf({ lotId: _, createdByName, ...row }: ListedSampleDrawRow, lot: string): SampleDrawView {
  const leftOut = row.leftOut as SampleDrawView["leftOut"];
  return { ...row, leftOut, lot, createdAt: row.createdAt.toISOString(), createdBy: createdByName };
}
