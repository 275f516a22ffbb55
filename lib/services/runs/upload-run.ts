import { sha256InSteps } from "@/builders/bundle/sha256";
import type { Trx } from "@/db/executor";
import { markSetsStale } from "@/db/queries/coefficients";
import { findDeviceIds, insertDevices } from "@/db/queries/devices";
import { getLot, type LotRow, lockLot } from "@/db/queries/lots";
import { insertReadings } from "@/db/queries/readings";
import {
  findEquipmentByCodes,
  findRunBySha256,
  getRun,
  insertRun,
  insertRunEquipment,
  insertRunFindings,
} from "@/db/queries/runs";
import type { Finding, Purpose, Reading } from "@/lib/domain/compensation/types";
import { mapInSteps, type Steps } from "@/lib/domain/steps";
import { AppError } from "@/lib/errors";
import { assertRole, type PersonCtx } from "@/lib/services/context";
import { inSlices } from "@/lib/services/in-slices";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { getLotRules } from "@/lib/services/lots/lot-rules";
import { findUsedPlan, takeUsedPlan } from "@/lib/services/run-plans/use-run-plan";
import { listEquipmentFindings } from "./equipment-findings";
import { getRunView } from "./get-run";
import { type RunFile, readRunFile } from "./read-run-file";

export interface NewRunInput {
  lot: string;
  purpose: Purpose;
  /** Codes. */
  equipment: readonly string[];
  addDevices: boolean;
  supersedes?: string;
  reason?: string;
  /** Planned run that these are the readings of. */
  plan?: string;
  fileName?: string;
  /** Of the file that the bytes were made from by column mapping, lower-case hex. */
  sourceSha256?: string;
  bytes: Buffer;
}

/**
 * Takes a run's readings into a lot, all of them or none.
 * @throws AppError `lot.not_found`, `run.duplicate` {run}, `run.invalid` {errors, errorCount}, `run.too_many_rows`,
 * `run.equipment_unknown` {codes}, `run.supersedes_other_lot`, `run.supersedes_other_purpose`, `run.already_superseded`,
 * `run_plan.not_found`, `run_plan.other_lot`, `run_plan.other_purpose`, `run_plan.wrong_state`
 */
export async function uploadRun(ctx: PersonCtx, input: NewRunInput) {
  assertRole(ctx, "engineer");
  const lot = await getLot(ctx.db, input.lot);
  const sha256 = await inSlices(sha256InSteps(input.bytes));
  const earlier = await findRunBySha256(ctx.db, lot.id, sha256);
  if (earlier) {
    const on = earlier.createdAt.toISOString().slice(0, 10);
    throw new AppError("run.duplicate", { run: earlier.id, message: `These very bytes were uploaded on ${on}.` });
  }
  await assertMaySupersede(ctx, lot, input);
  const plan = await findUsedPlan(ctx, { ...input, lotId: lot.id });
  const equipment = await requireEquipment(ctx, input.equipment);
  const { rules } = await getLotRules(ctx.db, lot);
  const file = await readRunFile(ctx.db, { ...input, lot, rules });
  const judge = function* () {
    return [
      ...(yield* file.judge()),
      ...(plan ? yield* plan.compare(file.readings, input.equipment) : []),
      ...listEquipmentFindings(equipment, lastTakenAt(file.readings)),
    ];
  };

  const id = ctx.newId();
  const stored = await ctx.db.transaction().execute(async (trx) => {
    // Under the lot's lock, a derivation that is just being finished sees this run, or this run sees its sets.
    if (input.supersedes !== undefined || file.unknown.length > 0) await lockLot(trx, lot.id);
    const added = await addUnknown(ctx, trx, lot, file);
    await insertRun(trx, runRowOf(ctx, id, lot, sha256, input, file), input.bytes);
    await takeUsedPlan(trx, plan);
    await insertRunEquipment(
      trx,
      id,
      equipment.map(({ code: _, ...one }) => one),
    );
    const findings = await judgeMeanwhile(judge(), insertReadings(trx, id, file.readings, file.deviceIds));
    await insertRunFindings(
      trx,
      id,
      findings.map((finding) => ({ ...finding, id: ctx.newId() })),
    );
    const stale = input.supersedes === undefined ? [] : await markSetsStale(trx, input.supersedes, ctx.now());
    const count = stale.reduce((sum, one) => sum + one.count, 0);
    await appendEvent(ctx, trx, {
      action: "run.uploaded",
      subject: id,
      data: {
        lot: lot.code,
        purpose: input.purpose,
        sha256: sha256.toString("hex"),
        ...(input.sourceSha256 !== undefined && { sourceSha256: input.sourceSha256 }),
        rows: file.readings.length,
        devices: file.deviceIds.size,
        added,
        equipment: equipment.map((one) => one.code),
        ...(plan && { plan: plan.id }),
        ...(input.supersedes !== undefined && {
          supersedes: input.supersedes,
          staleSets: count,
          staleIn: stale.map((one) => one.derivationId),
        }),
      },
      texts: { reason: input.reason },
    });
    return { added, staleSets: count };
  });
  return { ...(await getRunView(ctx, id)), ...stored };
}

/**
 * Judges readings while the server stores them: neither has to wait for the other, and an error undoes the transaction. Both
 * have ended when this returns or throws, so that nothing is sent after the end of the transaction.
 */
async function judgeMeanwhile(judge: Steps<Finding[]>, storing: Promise<void>): Promise<Finding[]> {
  const [judged, stored] = await Promise.allSettled([inSlices(judge), storing]);
  if (judged.status === "rejected") throw judged.reason;
  if (stored.status === "rejected") throw stored.reason;
  return judged.value;
}

async function assertMaySupersede(ctx: PersonCtx, lot: LotRow, input: NewRunInput): Promise<void> {
  if (input.supersedes === undefined) return;
  const replaced = await getRun(ctx.db, input.supersedes);
  if (replaced.lotId !== lot.id) {
    throw new AppError("run.supersedes_other_lot", {
      lot: replaced.lotCode,
      message: `That run belongs to lot ${replaced.lotCode}.`,
    });
  }
  if (replaced.purpose !== input.purpose) {
    const message = `That run is a ${replaced.purpose} run; only one of the same purpose can replace it.`;
    throw new AppError("run.supersedes_other_purpose", { purpose: replaced.purpose, message });
  }
  if (replaced.supersededById !== null) {
    throw new AppError("run.already_superseded", {
      by: replaced.supersededById,
      message: "That run was replaced before; replace the newer one.",
    });
  }
}

async function requireEquipment(ctx: PersonCtx, codes: readonly string[]) {
  const equipment = await findEquipmentByCodes(ctx.db, codes);
  const unknown = codes.filter((code) => !equipment.some((one) => one.code === code));
  if (unknown.length === 0) return equipment;
  throw new AppError("run.equipment_unknown", {
    codes: unknown,
    message: `There is no equipment ${unknown.join(", ")}; add it first.`,
  });
}

function lastTakenAt(readings: readonly Reading[]): string {
  let last = "";
  for (const { takenAt } of readings) if (takenAt > last) last = takenAt;
  return last;
}

/** Adds the devices that nobody added while the file was read. @returns how many */
async function addUnknown(ctx: PersonCtx, trx: Trx, lot: LotRow, file: RunFile): Promise<number> {
  for (const [serial, id] of await findDeviceIds(trx, lot.id, file.unknown)) file.deviceIds.set(serial, id);
  // In the order in which others add them too, so that two uploads can't each wait for what the other has added.
  const unknown = file.unknown.filter((serial) => !file.deviceIds.has(serial)).sort();
  const devices = await inSlices(mapInSteps(unknown, (serial) => ({ id: ctx.newId(), serial })));
  await insertDevices(trx, { lotId: lot.id, devices, addedAt: ctx.now(), addedBy: ctx.actor.id });
  for (const { id, serial } of devices) file.deviceIds.set(serial, id);
  return devices.length;
}

function runRowOf(ctx: PersonCtx, id: string, lot: LotRow, sha256: Buffer, input: NewRunInput, file: RunFile) {
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (const { chamberC } of file.readings) {
    low = Math.min(low, chamberC);
    high = Math.max(high, chamberC);
  }
  return {
    id,
    lotId: lot.id,
    purpose: input.purpose,
    sha256,
    sourceSha256: input.sourceSha256 === undefined ? null : Buffer.from(input.sourceSha256, "hex"),
    byteCount: input.bytes.length,
    rowCount: file.readings.length,
    deviceCount: file.deviceIds.size,
    fileName: input.fileName ?? null,
    temperatureLowC: low,
    temperatureHighC: high,
    supersedesId: input.supersedes ?? null,
    planId: input.plan ?? null,
    reason: input.reason ?? null,
    createdAt: ctx.now(),
    createdBy: ctx.actor.id,
  };
}
