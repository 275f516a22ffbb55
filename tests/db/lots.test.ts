import { sql } from "kysely";
import { v7 as uuidv7 } from "uuid";
import { beforeAll, describe, expect, it } from "vitest";
import { appErrorFromDatabase } from "@/db/constraint-codes";
import type { Trx } from "@/db/executor";
import {
  countDevices,
  findDeviceIds,
  findDevicesBySerial,
  findLotsOfSerials,
  insertDevices,
  listDevices,
} from "@/db/queries/devices";
import { insertFamily, insertFamilyRevision } from "@/db/queries/families";
import { getLot, insertLot, listLots, lockLot } from "@/db/queries/lots";
import { insertReadings, listReadings } from "@/db/queries/readings";
import { insertRun, listRunsOfLot } from "@/db/queries/runs";
import type { Reading } from "@/lib/domain/compensation/types";
import { numberSerials } from "@/lib/domain/serials";
import { documentDigest } from "@/lib/services/families/document-digest";
import { openTestDatabase, type TestDatabase } from "../support/database";
import { insertPerson } from "../support/people-rows";
import { firstGolden } from "../support/scenario/golden";

let database: TestDatabase;
let person: string;
const at = new Date();
const familyId = uuidv7();
const familyRevisionId = uuidv7();
const { family: document } = firstGolden();

beforeAll(async () => {
  database = await openTestDatabase();
  person = await insertPerson(database.owner, "writer", "engineer");
  const sha256 = documentDigest(document);
  await inTransaction(async (trx) => {
    await insertFamily(trx, { id: familyId, code: "MW-20", createdAt: at, createdBy: person });
    await insertFamilyRevision(trx, {
      id: familyRevisionId,
      familyId,
      number: 1,
      document,
      sha256,
      createdAt: at,
      createdBy: person,
    });
  });
});

const inTransaction = <T>(work: (trx: Trx) => Promise<T>) => database.db.transaction().execute(work);

async function addLot(code: string): Promise<string> {
  const id = uuidv7();
  await inTransaction((trx) =>
    insertLot(trx, { id, code, familyId, familyRevisionId, firmware: "2.3.0", createdAt: at, createdBy: person }),
  );
  return id;
}

const add = (lotId: string, serials: string[]) =>
  inTransaction((trx) =>
    insertDevices(trx, {
      lotId,
      devices: serials.map((serial) => ({ id: uuidv7(), serial })),
      addedAt: at,
      addedBy: person,
    }),
  );

describe("lots in the database", () => {
  it("are found by code in any case and by id, and their code stands once", async () => {
    const id = await addLot("MW20-A");
    expect(await getLot(database.db, "mw20-a")).toMatchObject({
      id,
      familyCode: "MW-20",
      revisionNumber: 1,
      sequence: 0,
    });
    expect(await getLot(database.db, id)).toMatchObject({ code: "MW20-A" });
    await expect(getLot(database.db, "NONE")).rejects.toMatchObject({ code: "lot.not_found" });
    await expect(addLot("MW20-A")).rejects.toMatchObject({ constraint: "lot_code_unique" });
    await expect(addLot("mw20 b")).rejects.toMatchObject({ constraint: "lot_code_form" });
  });

  it("never let their sequence fall", async () => {
    const id = await addLot("MW20-SEQ");
    const set = (sequence: number) => database.db.updateTable("lot").set({ sequence }).where("id", "=", id).execute();
    await set(3);
    await expect(set(2)).rejects.toMatchObject({ message: "lot.sequence_falls" });
  });

  it("list newest first, with filters and a cursor", async () => {
    const ids = [await addLot("PAGE-1"), await addLot("PAGE-2"), await addLot("PAGE-3")];
    const page = await listLots(database.db, { q: "page-", limit: 2 });
    expect(page.map((lot) => lot.code)).toEqual(["PAGE-3", "PAGE-2"]);
    expect((await listLots(database.db, { q: "PAGE-", before: ids[1], limit: 2 })).map((lot) => lot.code)).toEqual([
      "PAGE-1",
    ]);
    expect(await listLots(database.db, { q: "PAGE-", state: "live", limit: 9 })).toEqual([]);
    expect(await listLots(database.db, { q: "PAGE-", state: "planned", familyId, limit: 9 })).toHaveLength(3);
    expect(await listLots(database.db, { familyId: uuidv7(), limit: 9 })).toEqual([]);
  });

  it("are held by their lock", async () => {
    const id = await addLot("LOCKED");
    await inTransaction(async (trx) => {
      await lockLot(trx, id);
      const other = database.db.selectFrom("lot").select("id").where("id", "=", id).forUpdate().skipLocked().execute();
      expect(await other).toEqual([]);
    });
  });
});

describe("devices in the database", () => {
  it("belong to one lot for ever, and a clash adds none of a batch", async () => {
    const [first, second] = [await addLot("DEV-1"), await addLot("DEV-2")];
    await add(first, ["D-1", "D-2"]);
    const clash = add(second, ["D-3", "D-2"]);
    await expect(clash).rejects.toMatchObject({ constraint: "device_serial_unique" });
    expect(appErrorFromDatabase(await clash.catch((error) => error))).toMatchObject({ code: "device.in_other_lot" });
    expect(await countDevices(database.db, second)).toBe(0);
    const found = await findDevicesBySerial(database.db, ["D-2", "D-1", "D-9"]);
    expect(found.map((device) => [device.serial, device.lotCode])).toEqual([
      ["D-1", "DEV-1"],
      ["D-2", "DEV-1"],
    ]);
  });

  it("take serials of the agreed form only", async () => {
    const id = await addLot("DEV-FORM");
    await expect(add(id, ["lower"])).rejects.toMatchObject({ constraint: "device_serial_form" });
  });

  it("go in by the ten thousand in one statement and come out in pages by serial", async () => {
    const id = await addLot("DEV-MANY");
    const serials = numberSerials({ prefix: "MANY-", from: 1, count: 10_000, digits: 5 });
    await add(id, serials);
    expect(await countDevices(database.db, id)).toBe(10_000);
    const page = await listDevices(database.db, id, { after: "MANY-09998", limit: 5 });
    expect(page.map((device) => device.serial)).toEqual(["MANY-09999", "MANY-10000"]);
    expect(page[0]).toMatchObject({ coefficients: null, held: false });
    expect(await listDevices(database.db, id, { q: "0042", limit: 99 })).toHaveLength(11);
  });
});

describe("readings in the database", () => {
  const readingOf = (serial: string, row: number): Reading => ({
    row,
    serial,
    point: 1,
    chamberC: 20.5,
    soakMin: 95,
    deviceTemp: 1941.32,
    loadKg: 0,
    signalMvV: -0.0139659,
    takenAt: "2026-03-02T09:48:00.000Z",
  });

  async function store(lotId: string, readings: Reading[], devices: Map<string, string>): Promise<string> {
    const id = uuidv7();
    const none = { fileName: null, temperatureLowC: null, temperatureHighC: null, supersedesId: null, reason: null };
    await inTransaction(async (trx) => {
      const sizes = { byteCount: 1, rowCount: readings.length, deviceCount: devices.size };
      const made = {
        createdAt: at,
        createdBy: person,
        planId: null,
        sha256: Buffer.alloc(32, readings.length),
        sourceSha256: null,
      };
      await insertRun(trx, { id, lotId, purpose: "zero", ...sizes, ...none, ...made }, Buffer.from("x"));
      await insertReadings(trx, id, readings, devices);
    });
    return id;
  }

  it("come back as they were, over more than one statement", async () => {
    const id = await addLot("READ-1");
    await add(id, ["READ-1-A", "READ-1-B"]);
    const devices = await findDeviceIds(database.db, id, ["READ-1-A", "READ-1-B", "READ-1-C"]);
    expect([...devices.keys()].sort()).toEqual(["READ-1-A", "READ-1-B"]);
    const readings = Array.from({ length: 10_001 }, (_, index) =>
      readingOf(index % 2 ? "READ-1-A" : "READ-1-B", index + 2),
    );
    const optional = { position: 'shelf "A", 1', hardwareId: null, dwellS: 30, outputMvV: null };
    readings[10_000] = { ...(readings[10_000] as Reading), ...optional };
    const run = await store(id, readings, devices);
    const stored = await listReadings(database.db, [run]);
    expect(stored).toHaveLength(10_001);
    expect(stored[1]).toMatchObject({ ...readings[1], dwellS: null });
    expect(stored[10_000]).toMatchObject(readings[10_000] as Reading);
  });

  it("are refused for a device of another lot or of none, all of them", async () => {
    const [first, second] = [await addLot("READ-2"), await addLot("READ-3")];
    await add(first, ["READ-2-A"]);
    await add(second, ["READ-3-A"]);
    const wanted = ["READ-2-A", "READ-3-A", "READ-4-A"];
    const lots = await findLotsOfSerials(database.db, wanted);
    expect([...lots].sort()).toEqual([
      ["READ-2-A", "READ-2"],
      ["READ-3-A", "READ-3"],
    ]);
    const own = await findDeviceIds(database.db, first, wanted);
    const devices = new Map([...own, ...(await findDeviceIds(database.db, second, wanted))]);
    const rows = [readingOf("READ-2-A", 2), readingOf("READ-3-A", 3)];
    await expect(store(first, rows, devices)).rejects.toThrow("reading.device_of_other_lot");
    devices.set("READ-3-A", uuidv7());
    await expect(store(first, rows, devices)).rejects.toThrow("reading.device_of_other_lot");
    expect(await listRunsOfLot(database.db, first)).toEqual([]);
  });

  it("keep their devices: none can be removed", async () => {
    await expect(sql`delete from device where serial = 'READ-2-A'`.execute(database.owner)).rejects.toThrow(
      "database.append_only",
    );
  });
});
