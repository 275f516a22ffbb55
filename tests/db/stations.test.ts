import { sql } from "kysely";
import { v7 as uuidv7 } from "uuid";
import { beforeAll, describe, expect, it } from "vitest";
import { insertDeviceEvent, type NewDeviceEvent } from "@/db/queries/device-events";
import { insertWrites, lockStationUploads, type WriteRow } from "@/db/queries/writes";
import { openTestDatabase, type TestDatabase } from "../support/database";
import { insertMadeUpRow } from "../support/made-up-row";
import { insertPerson } from "../support/people-rows";

let database: TestDatabase;
let stationId: string;
let [engineer, service, deviceId]: string[] = [];

const idOf = async (table: string): Promise<string> => {
  const { rows } = await sql<{ id: string }>`select id from ${sql.table(table)} limit 1`.execute(database.owner);
  return rows[0]?.id ?? "";
};

beforeAll(async () => {
  database = await openTestDatabase();
  await insertMadeUpRow(database.owner, "station");
  await insertMadeUpRow(database.owner, "device");
  stationId = await idOf("station");
  deviceId = await idOf("device");
  engineer = await insertPerson(database.owner, "engineer", "engineer");
  service = await insertPerson(database.owner, "service", "service");
});

const record = (more: Partial<WriteRow> = {}): WriteRow => ({
  id: uuidv7(),
  stationId,
  counter: 1,
  serial: "A-1",
  deviceId: null,
  packageId: null,
  packageReported: "none",
  imageSha256: Buffer.alloc(32),
  result: "written",
  readbackSha256: null,
  serialBefore: null,
  hardwareId: null,
  firmware: null,
  zeroMvV: null,
  deviceTemp: null,
  startedAt: new Date(),
  finishedAt: new Date(),
  operator: "O. Perator",
  detail: null,
  outcome: "mismatch",
  flags: [],
  contentSha256: Buffer.alloc(32),
  receivedAt: new Date(),
  ...more,
});
const insert = (...rows: WriteRow[]) => database.db.transaction().execute((trx) => insertWrites(trx, rows));

describe("write records", () => {
  it("are stored once by id, and the first one stays", async () => {
    const first = record();
    expect(await insert(first)).toEqual([first.id]);
    expect(await insert({ ...first, outcome: "verified", serial: "A-2" })).toEqual([]);
    const { rows } = await sql<{ serial: string; outcome: string }>`
      select serial, outcome from write_record where id = ${first.id}::uuid`.execute(database.db);
    expect(rows).toEqual([{ serial: "A-1", outcome: "mismatch" }]);
  });

  it("can't be changed or removed by the app, nor by the owner", async () => {
    const { id } = record();
    await insert(record({ id }));
    const change = sql`update write_record set outcome = 'verified' where id = ${id}::uuid`;
    const removal = sql`delete from write_record where id = ${id}::uuid`;
    for (const statement of [change, removal]) {
      await expect(statement.execute(database.db)).rejects.toMatchObject({ code: "42501" });
      await expect(statement.execute(database.owner)).rejects.toMatchObject({ message: "database.append_only" });
    }
  });

  it("take no outcome or result but the known ones", async () => {
    await expect(insert(record({ outcome: "fine" as never }))).rejects.toMatchObject({ code: "23514" });
    await expect(insert(record({ result: "maybe" as never }))).rejects.toMatchObject({ code: "23514" });
    await expect(insert(record({ stationId: uuidv7() }))).rejects.toMatchObject({ code: "23503" });
  });

  it("of one station are taken one upload after the other", async () => {
    const order: string[] = [];
    let first: () => void = () => undefined;
    const holding = database.db.transaction().execute(async (trx) => {
      await lockStationUploads(trx, stationId);
      await new Promise<void>((resolve) => {
        first = resolve;
      });
      order.push("first");
    });
    await expect
      .poll(
        async () =>
          (
            await sql`select 1 from pg_locks where locktype = 'advisory' and database = (select oid from pg_database where datname = current_database())`.execute(
              database.owner,
            )
          ).rows.length,
      )
      .toBe(1);
    const waiting = database.db.transaction().execute(async (trx) => {
      await lockStationUploads(trx, stationId);
      order.push("second");
    });
    const other = database.db.transaction().execute((trx) => lockStationUploads(trx, uuidv7()));
    await other;
    first();
    await Promise.all([holding, waiting]);
    expect(order).toEqual(["first", "second"]);
  });
});

describe("holding a device and going on", () => {
  const event = (kind: NewDeviceEvent["kind"], personId: string) =>
    database.db.transaction().execute((trx) =>
      insertDeviceEvent(trx, {
        id: uuidv7(),
        deviceId: deviceId as string,
        kind,
        reason: "because",
        reference: null,
        hardwareId: null,
        firmware: null,
        personId,
        at: new Date(),
      }),
    );

  it("takes a second person, as the database says too", async () => {
    const [one, two] = [engineer as string, service as string];
    await expect(event("resume", two)).rejects.toMatchObject({ message: "device.not_held" });
    await event("hold", one);
    await expect(event("resume", one)).rejects.toMatchObject({ message: "device.self_approval" });
    await event("resume", two);
    await event("hold", two);
    await expect(event("resume", two)).rejects.toMatchObject({ message: "device.self_approval" });
  });

  it("knows no other kinds", async () => {
    await expect(event("lost" as never, engineer as string)).rejects.toMatchObject({ code: "23514" });
  });
});

describe("a key", () => {
  it("is stored as a hash that is unique", async () => {
    const key = () => sql`insert into station_key (id, station_id, key_hash, prefix, created_at, created_by)
      values (${uuidv7()}::uuid, ${stationId}::uuid, '\\x01', 'tws_1', now(), ${engineer}::uuid)`;
    await key().execute(database.db);
    await expect(key().execute(database.db)).rejects.toMatchObject({ constraint: "station_key_hash_unique" });
  });
});
