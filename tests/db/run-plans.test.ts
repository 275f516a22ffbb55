import { randomBytes } from "node:crypto";
import { sql } from "kysely";
import { v7 as uuidv7 } from "uuid";
import { beforeAll, describe, expect, it } from "vitest";
import { appErrorFromDatabase } from "@/db/constraint-codes";
import type { Trx } from "@/db/executor";
import { insertBatchCorrections, insertDevices, updateBatches } from "@/db/queries/devices";
import { insertFamily, insertFamilyRevision } from "@/db/queries/families";
import { insertLot } from "@/db/queries/lots";
import { insertRunPlan, markPlanDropped, markPlanUsed } from "@/db/queries/run-plans";
import { insertRun } from "@/db/queries/runs";
import { documentDigest } from "@/lib/services/families/document-digest";
import { openTestDatabase, type TestDatabase } from "../support/database";
import { insertPerson } from "../support/people-rows";
import { firstGolden } from "../support/scenario/golden";

let database: TestDatabase;
let person: string;
const at = new Date();
const lots = { a: uuidv7(), b: uuidv7() };
const [first, second] = [uuidv7(), uuidv7()];

beforeAll(async () => {
  database = await openTestDatabase();
  person = await insertPerson(database.owner, "writer", "engineer");
  const { family: document } = firstGolden();
  const familyId = uuidv7();
  const familyRevisionId = uuidv7();
  const made = { createdAt: at, createdBy: person };
  await write(async (trx) => {
    await insertFamily(trx, { id: familyId, code: "MW-20", ...made });
    const sha256 = documentDigest(document);
    await insertFamilyRevision(trx, { id: familyRevisionId, familyId, number: 1, document, sha256, ...made });
    for (const [code, id] of Object.entries(lots))
      await insertLot(trx, { id, code: code.toUpperCase(), familyId, familyRevisionId, firmware: "2.3.0", ...made });
    const devices = [
      { id: first, serial: "S-1", gaugeBatch: "G-1" },
      { id: second, serial: "S-2" },
    ];
    await insertDevices(trx, { lotId: lots.a, devices, addedAt: at, addedBy: person });
  });
});

const write = <T>(work: (trx: Trx) => Promise<T>) => database.db.transaction().execute(work);

async function plan(name: string, positions = ["P1", "P2"]): Promise<string> {
  const id = uuidv7();
  const devices = [first, second].map((device, i) => ({ id: device, position: positions[i] as string }));
  const point = { point: 1, setC: 20, soakMin: 90, loadsKg: [], repeats: 1, dwellS: 0 };
  const row = { id, name, lotId: lots.a, purpose: "zero" as const, points: [point], notes: null, sampleDrawId: null };
  await write((trx) => insertRunPlan(trx, { ...row, devices, equipmentIds: [], createdAt: at, createdBy: person }));
  return id;
}

async function run(planId: string | null, more: object = {}): Promise<string> {
  const id = uuidv7();
  const row = {
    id,
    lotId: lots.a,
    purpose: "zero" as const,
    sha256: randomBytes(32),
    byteCount: 1,
    rowCount: 1,
    deviceCount: 1,
  };
  const rest = { fileName: null, temperatureLowC: 1, temperatureHighC: 2, supersedesId: null, reason: null };
  const made = { createdAt: at, createdBy: person };
  await write((trx) => insertRun(trx, { ...row, ...rest, ...made, planId, ...more } as never, Buffer.from("x")));
  return id;
}

const refusal = async (work: Promise<unknown>) =>
  appErrorFromDatabase(await work.then(() => undefined).catch((error: unknown) => error))?.code;

describe("a plan in the database", () => {
  it("has its name once in a lot, and each place and device once", async () => {
    await plan("Once");
    expect(await refusal(plan("Once"))).toBe("run_plan.exists");
    await expect(plan("Twice", ["P1", "P1"])).rejects.toMatchObject({ constraint: "run_plan_position_once" });
    const { rows } = await sql`select 1 from run_plan where name = 'Twice'`.execute(database.db);
    expect(rows).toEqual([]);
  });

  it("never changes but for its state", async () => {
    const id = await plan("Frozen");
    const change = database.db.updateTable("runPlan").set({ name: "Other" }).where("id", "=", id).execute();
    expect(await refusal(change)).toBe("run_plan.immutable");
  });

  it("is used by a run only, and dropped with a person and a reason only", async () => {
    const id = await plan("Used");
    expect(await refusal(write((trx) => markPlanUsed(trx, id)))).toBe("run_plan.no_run");
    const bare = database.db.updateTable("runPlan").set({ state: "dropped" }).where("id", "=", id).execute();
    await expect(bare).rejects.toMatchObject({ constraint: "run_plan_dropped" });
    await run(id);
    await write((trx) => markPlanUsed(trx, id));
    const drop = () => write((trx) => markPlanDropped(trx, id, { reason: "late", by: person, at }));
    expect(await refusal(drop())).toBe("run_plan.wrong_state");
  });

  it("takes a run of its lot and purpose, one, and after that corrected files of it only", async () => {
    const id = await plan("Guarded");
    expect(await refusal(run(id, { lotId: lots.b }))).toBe("run_plan.other_lot");
    expect(await refusal(run(id, { purpose: "sample" }))).toBe("run_plan.other_purpose");
    const stored = await run(id);
    await write((trx) => markPlanUsed(trx, id));
    const other = await run(null);
    expect(await refusal(run(id))).toBe("run_plan.wrong_state");
    expect(await refusal(run(id, { supersedesId: other, reason: "another run" }))).toBe("run_plan.wrong_state");
    await run(id, { supersedesId: stored, reason: "corrected" });
  });

  it("takes no run once it is dropped, and is not taken up again", async () => {
    const id = await plan("Gone");
    await write((trx) => markPlanDropped(trx, id, { reason: "chamber broken", by: person, at }));
    expect(await refusal(run(id))).toBe("run_plan.wrong_state");
    const back = database.db
      .updateTable("runPlan")
      .set({ state: "planned", dropReason: null, droppedBy: null, droppedAt: null })
      .where("id", "=", id);
    expect(await refusal(back.execute())).toBe("run_plan.wrong_state");
  });
});

describe("a device's batches in the database", () => {
  const set = (id: string, gaugeBatch: string | null, materialBatch: string | null = null) =>
    write((trx) => updateBatches(trx, [{ id, gaugeBatch, materialBatch }]));
  const correct = (id: string, gaugeBatch: string | null, reason: string) =>
    write((trx) => {
      const devices = [{ id, gaugeBatch, materialBatch: null, correctionId: uuidv7() }];
      return insertBatchCorrections(trx, { devices, reason, personId: person, at: new Date() });
    });

  it("are told once, and changed or taken back only to what a correction with a reason names", async () => {
    await set(second, "G-2");
    expect(await refusal(set(second, "G-3"))).toBe("device.batch_differs");
    expect(await refusal(set(second, null))).toBe("device.batch_differs");
    await expect(correct(second, "G-3", " ")).rejects.toMatchObject({ constraint: "device_batch_correction_reason" });
    await correct(second, "G-3", "misread");
    expect(await refusal(set(second, "G-4"))).toBe("device.batch_differs");
    await set(second, "G-3");
  });

  it("have the form of codes", async () => {
    await expect(set(first, "G-1", "=1+1")).rejects.toMatchObject({ constraint: "device_material_batch_form" });
  });
});
