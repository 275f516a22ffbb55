import { v7 as uuidv7 } from "uuid";
import { beforeAll, describe, expect, it } from "vitest";
import { type EquipmentRow, insertEquipment, lockEquipment, updateEquipment } from "@/db/queries/equipment";
import { openTestDatabase, type TestDatabase } from "../support/database";
import { insertPerson } from "../support/people-rows";

let database: TestDatabase;
let person: string;
const at = new Date();
const places = [{ position: "A1", deviationK: -0.1, uncertaintyK: 0.05 }];

beforeAll(async () => {
  database = await openTestDatabase();
  person = await insertPerson(database.owner, "keeper", "engineer");
});

function chamber(code: string, values: Partial<EquipmentRow> = {}): EquipmentRow {
  const certificate = { certificate: "K-1", calibratedUntil: "2027-03-31", uncertainty: 0.2, coverageFactor: 2 };
  const row = { id: uuidv7(), code, kind: "chamber" as const, ...certificate, positions: places };
  return { ...row, createdAt: at, createdBy: person, updatedAt: at, ...values };
}

const insert = (row: EquipmentRow) => database.db.transaction().execute((trx) => insertEquipment(trx, row));

describe("equipment in the database", () => {
  it("keeps a chamber's places as they were given, and changes what is named only", async () => {
    await insert(chamber("CH-1"));
    const row = await database.db.transaction().execute(async (trx) => {
      const { id } = await lockEquipment(trx, "CH-1");
      await updateEquipment(trx, id, { coverageFactor: 1.96, updatedAt: at });
      return lockEquipment(trx, id);
    });
    expect(row).toMatchObject({ coverageFactor: 1.96, positions: places, certificate: "K-1" });
  });

  it("refuses a coverage factor that is not above 0, and places of anything but a chamber", async () => {
    await expect(insert(chamber("CH-2", { coverageFactor: 0 }))).rejects.toMatchObject({
      constraint: "equipment_coverage_factor",
    });
    await expect(insert(chamber("PT-1", { kind: "sensor" }))).rejects.toMatchObject({
      constraint: "equipment_positions_of_chamber",
    });
    await insert(chamber("PT-1", { kind: "sensor", positions: [] }));
  });
});
