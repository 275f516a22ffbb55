import { sql } from "kysely";
import type { Db, Trx } from "@/db/executor";
import type { Coefficients } from "@/lib/domain/compensation/types";
import { AppError } from "@/lib/errors";

export type SetState = "proposed" | "approved" | "refused" | "stale" | "revoked";
export type SetRole = "sample" | "zero" | "verification" | "excluded" | "imported";

/** Values as columns; all null where a device got none. */
interface ValueColumns {
  tempOffset: number | null;
  tempSlope: number | null;
  zero: number | null;
  zeroTc: number | null;
  zeroTc2: number | null;
  gain: number | null;
  gainTc: number | null;
  gainTc2: number | null;
}

/** The coefficients of a row, null where the device got none. Members of order 2 are there only where stored. */
export function coefficientsOf(row: ValueColumns): Coefficients | null {
  const { tempOffset, tempSlope, zero, zeroTc, zeroTc2, gain, gainTc, gainTc2 } = row;
  if (gain === null) return null;
  return {
    tempOffset: tempOffset as number,
    tempSlope: tempSlope as number,
    zero: zero as number,
    zeroTc: zeroTc as number,
    ...(zeroTc2 !== null && { zeroTc2 }),
    gain,
    gainTc: gainTc as number,
    ...(gainTc2 !== null && { gainTc2 }),
  };
}

/** A device's set of one derivation. */
export interface SetRow {
  id: string;
  derivationId: string;
  deviceId: string;
  serial: string;
  role: SetRole;
  state: SetState | null;
  coefficients: Coefficients | null;
  detail: unknown;
}

const valueColumns = [
  "coefficientSet.tempOffset",
  "coefficientSet.tempSlope",
  "coefficientSet.zero",
  "coefficientSet.zeroTc",
  "coefficientSet.zeroTc2",
  "coefficientSet.gain",
  "coefficientSet.gainTc",
  "coefficientSet.gainTc2",
] as const;

function selectSets(db: Db) {
  return db
    .selectFrom("coefficientSet")
    .innerJoin("device", "device.id", "coefficientSet.deviceId")
    .select([
      "coefficientSet.id",
      "coefficientSet.derivationId",
      "coefficientSet.deviceId",
      "device.serial",
      "coefficientSet.role",
      "coefficientSet.state",
      "coefficientSet.detail",
      ...valueColumns,
    ])
    .$narrowType<{ role: SetRole; state: SetState | null }>();
}

function setOf<R extends ValueColumns>(row: R): Omit<R, keyof ValueColumns> & { coefficients: Coefficients | null } {
  const { tempOffset, tempSlope, zero, zeroTc, zeroTc2, gain, gainTc, gainTc2, ...rest } = row;
  return { ...rest, coefficients: coefficientsOf(row) };
}

/** Sets of a derivation by serial, one page of them. */
export async function listSets(
  db: Db,
  derivationId: string,
  page: { after?: string; limit?: number; roles?: readonly SetRole[] } = {},
): Promise<SetRow[]> {
  let query = selectSets(db).where("coefficientSet.derivationId", "=", derivationId).orderBy("device.serial");
  if (page.roles !== undefined) query = query.where("coefficientSet.role", "in", [...page.roles]);
  if (page.after !== undefined) query = query.where("device.serial", ">", page.after);
  if (page.limit !== undefined) query = query.limit(page.limit);
  return (await query.execute()).map(setOf);
}

/** The set of one device in a derivation. @throws AppError `coefficients.not_found` */
export async function getSet(db: Db, derivationId: string, serial: string): Promise<SetRow> {
  const row = await selectSets(db)
    .where("coefficientSet.derivationId", "=", derivationId)
    .where("device.serial", "=", serial)
    .executeTakeFirstOrThrow(
      () => new AppError("coefficients.not_found", { serial, message: `${serial} is not in this derivation.` }),
    );
  return setOf(row);
}

/** Serial, role and state of every set of a derivation, locked until commit. */
export async function lockSetStates(
  trx: Trx,
  derivationId: string,
): Promise<{ id: string; serial: string; role: SetRole; state: SetState | null }[]> {
  return trx
    .selectFrom("coefficientSet")
    .innerJoin("device", "device.id", "coefficientSet.deviceId")
    .select(["coefficientSet.id", "device.serial", "coefficientSet.role", "coefficientSet.state"])
    .$narrowType<{ role: SetRole; state: SetState | null }>()
    .where("coefficientSet.derivationId", "=", derivationId)
    .orderBy("device.serial")
    .forUpdate("coefficientSet")
    .execute();
}

/** Moves sets to a state. @throws `coefficients.wrong_state`, `coefficients.not_approved` as raised by the trigger */
export async function updateSetStates(trx: Trx, ids: readonly string[], state: SetState, at: Date): Promise<void> {
  if (ids.length === 0) return;
  await trx
    .updateTable("coefficientSet")
    .set({ state, stateChangedAt: at })
    .where(sql<boolean>`id = any(${ids as string[]}::uuid[])`)
    .execute();
}

/** Makes every undecided or approved set stale whose derivation used a run; returns their number by derivation. */
export async function markSetsStale(
  trx: Trx,
  runId: string,
  at: Date,
): Promise<{ derivationId: string; count: number }[]> {
  const rows = await trx
    .updateTable("coefficientSet")
    .set({ state: "stale", stateChangedAt: at })
    .where("state", "in", ["proposed", "approved"])
    .where("derivationId", "in", (eb) =>
      eb.selectFrom("derivationRun").select("derivationId").where("runId", "=", runId),
    )
    .returning("derivationId")
    .execute();
  const counts = new Map<string, number>();
  for (const { derivationId } of rows) counts.set(derivationId, (counts.get(derivationId) ?? 0) + 1);
  return [...counts].map(([derivationId, count]) => ({ derivationId, count }));
}

/** The newest set of a device, with what a package needs to know about both. */
export interface NewestSetRow {
  setId: string;
  derivationId: string;
  derivationCreatedAt: Date;
  familyRevisionId: string;
  method: "individual" | "pooled-gain" | "import";
  order: 1 | 2;
  role: SetRole;
  state: SetState;
  coefficients: Coefficients;
  deviceId: string;
  serial: string;
  hardwareId: string | null;
  held: boolean;
  scrapped: boolean;
}

export interface NewestSetFilter {
  /** Only sets in these states compete for being the newest; all by default. */
  states?: readonly SetState[];
  /** Serial after which the page starts. */
  after?: string;
  limit?: number;
  serial?: string;
}

/**
 * The newest set with values of each device of a lot, by creation of its derivation, in the order of the serials.
 * Devices without any set are not in the list.
 */
export async function listNewestSets(db: Db, lotId: string, filter: NewestSetFilter = {}): Promise<NewestSetRow[]> {
  let query = db
    .selectFrom("device")
    .innerJoin("coefficientSet", "coefficientSet.deviceId", "device.id")
    .innerJoin("derivation", "derivation.id", "coefficientSet.derivationId")
    .distinctOn("device.serial")
    .select([
      "coefficientSet.id as setId",
      "coefficientSet.derivationId",
      "derivation.createdAt as derivationCreatedAt",
      "derivation.familyRevisionId",
      "derivation.method",
      "derivation.fitOrder as order",
      "coefficientSet.role",
      "coefficientSet.state",
      "device.id as deviceId",
      "device.serial",
      "device.hardwareId",
      "device.held",
      "device.scrapped",
      ...valueColumns,
    ])
    .where("device.lotId", "=", lotId)
    .where("coefficientSet.gain", "is not", null)
    .orderBy("device.serial")
    .orderBy("derivation.createdAt", "desc")
    .orderBy("derivation.id", "desc");
  if (filter.states !== undefined) query = query.where("coefficientSet.state", "in", [...filter.states]);
  if (filter.after !== undefined) query = query.where("device.serial", ">", filter.after);
  if (filter.serial !== undefined) query = query.where("device.serial", "=", filter.serial);
  if (filter.limit !== undefined) query = query.limit(filter.limit);
  return (await query.execute()).map((row) => setOf(row) as unknown as NewestSetRow);
}

/** How many sets of a derivation are in each state; those without values are left out. */
export async function countSetStates(db: Db, derivationId: string): Promise<Partial<Record<SetState, number>>> {
  const rows = await db
    .selectFrom("coefficientSet")
    .select(["state", sql<number>`count(*)::int`.as("count")])
    .where("derivationId", "=", derivationId)
    .where("state", "is not", null)
    .groupBy("state")
    .execute();
  return Object.fromEntries(rows.map(({ state, count }) => [state, count]));
}

/** Role, state and values of one device, without what stands beside them. */
export interface SetValuesRow {
  serial: string;
  role: SetRole;
  state: SetState | null;
  coefficients: Coefficients | null;
}

/** Sets that a statement gives: about 10 ms of this process. */
const SETS_A_STATEMENT = 2_000;

/** The values of every set of a derivation, by serial. */
export async function listSetValues(db: Db, derivationId: string): Promise<SetValuesRow[]> {
  const sets: SetValuesRow[] = [];
  for (let after: string | undefined, more = true; more; ) {
    const rows = await selectSetValues(db, derivationId, after).execute();
    for (const { deviceId: _, ...row } of rows) sets.push(setOf(row));
    after = rows.at(-1)?.deviceId;
    more = rows.length === SETS_A_STATEMENT;
  }
  return sets.sort((a, b) => (a.serial < b.serial ? -1 : 1));
}

/** The next statement's worth, by device: the order of an index, so that no page has to sort them all. */
function selectSetValues(db: Db, derivationId: string, after: string | undefined) {
  const query = db
    .selectFrom("coefficientSet")
    .innerJoin("device", "device.id", "coefficientSet.deviceId")
    .select([
      "coefficientSet.deviceId",
      "device.serial",
      "coefficientSet.role",
      "coefficientSet.state",
      ...valueColumns,
    ])
    .$narrowType<{ role: SetRole; state: SetState | null }>()
    .where("coefficientSet.derivationId", "=", derivationId)
    .orderBy("coefficientSet.deviceId")
    .limit(SETS_A_STATEMENT);
  return after === undefined ? query : query.where("coefficientSet.deviceId", ">", after);
}
