import { sql } from "kysely";
import type { Db, Trx } from "@/db/executor";
import type { Purpose } from "@/lib/domain/compensation/types";
import type { PlannableDevice } from "@/lib/domain/run-plan/check-plan";
import type { PlannedDevice, PlannedPoint } from "@/lib/domain/run-plan/run-plan";
import { AppError } from "@/lib/errors";

export type RunPlanState = "planned" | "used" | "dropped";

export interface RunPlanRow {
  id: string;
  lotId: string;
  lotCode: string;
  name: string;
  purpose: Purpose;
  points: PlannedPoint[];
  notes: string | null;
  sampleDrawId: string | null;
  state: RunPlanState;
  dropReason: string | null;
  droppedByName: string | null;
  droppedAt: Date | null;
  createdAt: Date;
  createdByName: string;
  deviceCount: number;
  equipmentCodes: string[];
}

function selectPlan(db: Db) {
  return db
    .selectFrom("runPlan")
    .innerJoin("lot", "lot.id", "runPlan.lotId")
    .innerJoin("person", "person.id", "runPlan.createdBy")
    .leftJoin("person as dropper", "dropper.id", "runPlan.droppedBy")
    .select([
      "runPlan.id",
      "runPlan.lotId",
      "lot.code as lotCode",
      "runPlan.name",
      "runPlan.purpose",
      "runPlan.points",
      "runPlan.notes",
      "runPlan.sampleDrawId",
      "runPlan.state",
      "runPlan.dropReason",
      "dropper.name as droppedByName",
      "runPlan.droppedAt",
      "runPlan.createdAt",
      "person.name as createdByName",
    ])
    .select((eb) =>
      eb
        .selectFrom("runPlanDevice")
        .select(sql<number>`count(*)::int`.as("count"))
        .whereRef("runPlanDevice.planId", "=", "runPlan.id")
        .as("deviceCount"),
    )
    .select((eb) =>
      eb
        .selectFrom("runPlanEquipment")
        .innerJoin("equipment", "equipment.id", "runPlanEquipment.equipmentId")
        .select(sql<string[]>`coalesce(array_agg(equipment.code order by equipment.code), '{}')`.as("codes"))
        .whereRef("runPlanEquipment.planId", "=", "runPlan.id")
        .as("equipmentCodes"),
    );
}

type SelectedRow = Awaited<ReturnType<ReturnType<typeof selectPlan>["executeTakeFirstOrThrow"]>>;
const rowOf = (row: SelectedRow) => row as unknown as RunPlanRow;

const notFound = (id: string) =>
  new AppError("run_plan.not_found", { plan: id, message: `There is no planned run ${id}.` });

/** A planned run. @throws AppError `run_plan.not_found` */
export async function getRunPlan(db: Db, id: string): Promise<RunPlanRow> {
  const row = await selectPlan(db)
    .where("runPlan.id", "=", id)
    .executeTakeFirstOrThrow(() => notFound(id));
  return rowOf(row);
}

/** A planned run, its row locked until commit. @throws AppError `run_plan.not_found` */
export async function lockRunPlan(trx: Trx, id: string): Promise<RunPlanRow> {
  const row = await selectPlan(trx)
    .where("runPlan.id", "=", id)
    .forUpdate("runPlan")
    .executeTakeFirstOrThrow(() => notFound(id));
  return rowOf(row);
}

/** A lot's planned runs, newest first. */
export async function listRunPlans(
  db: Db,
  lotId: string,
  { before, limit, state }: { before?: string; limit: number; state?: RunPlanState },
): Promise<RunPlanRow[]> {
  let query = selectPlan(db).where("runPlan.lotId", "=", lotId).orderBy("runPlan.id", "desc").limit(limit);
  if (before !== undefined) query = query.where("runPlan.id", "<", before);
  if (state !== undefined) query = query.where("runPlan.state", "=", state);
  return (await query.execute()).map(rowOf);
}

/** Plans of any lot that wait for their readings, the longest waiting first. */
export async function listWaitingRunPlans(db: Db, limit: number): Promise<RunPlanRow[]> {
  const rows = await selectPlan(db).where("runPlan.state", "=", "planned").orderBy("runPlan.id").limit(limit).execute();
  return rows.map(rowOf);
}

/** Devices of a plan in working order. */
export async function listPlanDevices(db: Db, planId: string): Promise<PlannedDevice[]> {
  return db
    .selectFrom("runPlanDevice")
    .innerJoin("device", "device.id", "runPlanDevice.deviceId")
    .select(["device.serial", "runPlanDevice.position"])
    .where("runPlanDevice.planId", "=", planId)
    .orderBy("runPlanDevice.place")
    .execute();
}

export interface PlanEquipmentRow {
  code: string;
  kind: string;
  certificate: string;
  /** `YYYY-MM-DD` */
  calibratedUntil: string;
  uncertainty: number;
}

/** Equipment of a plan as it stands now, by code. */
export async function listPlanEquipment(db: Db, planId: string): Promise<PlanEquipmentRow[]> {
  const rows = await db
    .selectFrom("runPlanEquipment")
    .innerJoin("equipment", "equipment.id", "runPlanEquipment.equipmentId")
    .select([
      "equipment.code",
      "equipment.kind",
      "equipment.certificate",
      "equipment.calibratedUntil",
      "equipment.uncertainty",
    ])
    .where("runPlanEquipment.planId", "=", planId)
    .orderBy("equipment.code")
    .execute();
  // The driver is told to leave dates as text (they have no time zone); the generated type calls them Date.
  return rows as unknown as PlanEquipmentRow[];
}

/** Runs that were uploaded for a plan, oldest first. */
export async function listPlanRuns(
  db: Db,
  planId: string,
): Promise<{ id: string; createdAt: Date; supersededById: string | null }[]> {
  return db
    .selectFrom("run")
    .leftJoin("run as later", "later.supersedesId", "run.id")
    .select(["run.id", "run.createdAt", "later.id as supersededById"])
    .where("run.planId", "=", planId)
    .orderBy("run.id")
    .execute();
}

/** Seed and size of a lot's draw; undefined where the lot has no such draw. */
export async function findDrawOfLot(
  db: Db,
  lotId: string,
  id: string,
): Promise<{ id: string; seed: string; count: number } | undefined> {
  return db
    .selectFrom("sampleDraw")
    .select(["id", "seed", "count"])
    .where("lotId", "=", lotId)
    .where("id", "=", id)
    .executeTakeFirst();
}

export type PlannableDeviceRow = PlannableDevice & { id: string };

/** Devices of a lot as plans have to know them, by serial: those named, or all. */
export async function listPlannableDevices(
  db: Db,
  lotId: string,
  serials?: readonly string[],
): Promise<PlannableDeviceRow[]> {
  const { rows } = await sql<PlannableDeviceRow>`
    select device.id, device.serial, device.held, device.scrapped, device.shipped, coalesce(measured.purposes, '{}') as measured_in
    from device left join (
      select g.device_id, array_agg(distinct r.purpose) as purposes from reading g join run r on r.id = g.run_id
      where r.lot_id = ${lotId}::uuid and not exists (select 1 from run later where later.supersedes_id = r.id)
      group by g.device_id
    ) measured on measured.device_id = device.id
    where device.lot_id = ${lotId}::uuid
      and (${serials === undefined}::boolean or device.serial = any(${(serials ?? []) as string[]}::text[]))
    order by device.serial
  `.execute(db);
  return rows;
}

export interface NewRunPlanRow {
  id: string;
  lotId: string;
  name: string;
  purpose: Purpose;
  points: readonly PlannedPoint[];
  notes: string | null;
  sampleDrawId: string | null;
  createdAt: Date;
  createdBy: string;
  /** In working order. */
  devices: readonly { id: string; position: string }[];
  equipmentIds: readonly string[];
}

/** Adds a plan. @throws constraint `run_plan_name_unique` → `run_plan.exists` */
export async function insertRunPlan(trx: Trx, plan: NewRunPlanRow): Promise<void> {
  const { devices, equipmentIds, points, ...row } = plan;
  await trx
    .insertInto("runPlan")
    .values({ ...row, points: JSON.stringify(points) })
    .execute();
  const ids = devices.map((device) => device.id);
  const positions = devices.map((device) => device.position);
  await sql`
    insert into run_plan_device (plan_id, device_id, place, position)
    select ${plan.id}::uuid, given.device_id, given.place, given.position
    from unnest(${ids}::uuid[], ${positions}::text[]) with ordinality as given (device_id, position, place)
  `.execute(trx);
  if (equipmentIds.length === 0) return;
  const equipment = equipmentIds.map((equipmentId) => ({ planId: plan.id, equipmentId }));
  await trx.insertInto("runPlanEquipment").values(equipment).execute();
}

/** Notes that a run was uploaded for a plan. @throws trigger `run_plan.wrong_state` */
export async function markPlanUsed(trx: Trx, id: string): Promise<void> {
  await trx.updateTable("runPlan").set({ state: "used" }).where("id", "=", id).execute();
}

/** Drops a plan. @throws trigger `run_plan.wrong_state` */
export async function markPlanDropped(
  trx: Trx,
  id: string,
  { reason, by, at }: { reason: string; by: string; at: Date },
): Promise<void> {
  const dropped = { state: "dropped", dropReason: reason, droppedBy: by, droppedAt: at };
  await trx.updateTable("runPlan").set(dropped).where("id", "=", id).execute();
}
