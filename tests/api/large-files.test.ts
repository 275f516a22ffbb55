/** Files that are read, judged and stored in slices: what they hold is taken as a whole, or nothing of it. */
import { sql } from "kysely";
import { beforeAll, beforeEach, describe, expect, it } from "vitest";
import { numberSerials } from "@/lib/domain/serials";
import { addDevices } from "@/lib/services/lots/add-devices";
import { addLot } from "@/lib/services/lots/add-lot";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD } from "../support/people";
import { arrangeFamilyLot } from "../support/scenario/family-lot";

/** More than any slice, page or statement takes. */
const DEVICES = 4_500;
const LAST_ROW = DEVICES + 1;

let api: TestApi;
let before: string;
const serialsOf = (prefix: string) => numberSerials({ prefix, from: 1, count: DEVICES, digits: 5 });
const serials = serialsOf("BIG-");

const SETS = "serial,tempOffset,tempSlope,zero,zeroTc,gain,gainTc";
const valuesOf = (i: number) => [-231.9 + i / 7, 0.1246, -i / 3e6, 6.9e-6, 1 + i / 3e7, -4.1e-4 - i / 3e9];
const sets = serials.map((serial, i) => [serial, ...valuesOf(i)].join(","));

const READINGS = "serial,point,chamber_c,soak_min,device_temp,load_kg,signal_mv_v,taken_at";
const readings = (all: readonly string[]) =>
  all.map((serial, i) => `${serial},1,10.5,98,${1900 + i / 100},0,${-0.0139659 + i / 1e7},2026-03-02T09:48:00Z`);

const fileOf = (header: string, rows: readonly string[], last = rows.at(-1) as string) =>
  `${[header, ...rows.slice(0, -1), last].join("\n")}\n`;
const send = (path: string, body: string, query: Record<string, string | number | boolean>) =>
  api.call("POST", `/lots/BIG/${path}`, { as: "engineer", body, query, headers: { "content-type": "text/csv" } });
const base = { referenceC: 20, capacityKg: 20 };

const TABLES = [
  ...["derivation", "coefficient_set", "import_file", "derivation_finding", "maker", "mail"],
  ...["run", "run_file", "run_finding", "reading", "device", "ledger_event"],
];

/** Rows of every table that such a file may write to. */
async function countRows(): Promise<string> {
  const counts = TABLES.map((table) => sql`(select count(*) from ${sql.table(table)})`);
  const { rows } = await sql<{ counts: string }>`select concat_ws(' ', ${sql.join(counts)}) as counts`.execute(
    api.owner,
  );
  return rows[0]?.counts ?? "";
}

beforeAll(async () => {
  api = await openTestApi();
  const people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  const { family } = await arrangeFamilyLot(people);
  for (const code of ["BIG", "OTHER"]) {
    await addLot(people.engineer, { code, family: family.code, firmware: "2.3.0" });
  }
  await addDevices(people.engineer, { lot: "BIG", serials });
});
beforeEach(async () => {
  before = await countRows();
});

describe("a large file of coefficients", () => {
  it.each([
    ["a cell that is no number", `${serials.at(-1)},1,1,1,1,x,1`, "gain reading.not_a_number"],
    ["a serial that the lot has not", `BIG-X,${valuesOf(0)}`, "serial device.unknown"],
    ["the serial of the first row", `${serials[0]},${valuesOf(0)}`, "serial coefficients.serial_repeated"],
    ["a cell too few", `${serials.at(-1)},1`, " row.cells_wrong"],
    ["a quotation mark out of place", `${serials.at(-1)},1"2,1,1,1,1,1`, " file.quotes_wrong"],
  ])("is refused whole for %s in its last row", async (_, last, expected) => {
    const file = fileOf(SETS, sets, last);
    const refused = await send("coefficients", file, base);
    expect([refused.status, refused.body.code, refused.body.errorCount]).toEqual([422, "coefficients.invalid", 1]);
    const [{ row, column, code }] = refused.body.errors;
    expect(`${row} ${column} ${code}`).toBe(`${LAST_ROW} ${expected}`);
    const preview = await send("coefficients", file, { ...base, preview: true });
    expect([preview.status, preview.body.errors]).toEqual([200, refused.body.errors]);
    expect(await countRows()).toBe(before);
  });

  it("comes back value by value", async () => {
    const reply = await send("coefficients", fileOf(SETS, sets), base);
    expect([reply.status, reply.body.counts?.devices]).toEqual([201, DEVICES]);
    const headers = { accept: "text/csv" };
    const { body } = await api.call("GET", "/lots/BIG/coefficients", { as: "auditor", headers });
    const lines: string[] = body.trim().split("\n").slice(1);
    expect(lines.map((line) => line.split(",").slice(0, 7))).toEqual(sets.map((line) => line.split(",").map(asShown)));
  });
});

/** A cell as the product writes it: serials as they are, numbers in full. */
const asShown = (cell: string, place: number) => (place === 0 ? cell : String(Number(cell)));

describe("a large run", () => {
  const [lastSerial, lastReading] = [serials.at(-1), readings(serials).at(-1) as string];

  it.each([
    ["a cell that is no number", lastReading.replace("10.5", "x"), "chamber_c reading.not_a_number"],
    ["a device that no lot has", lastReading.replace(`${lastSerial}`, "NEW-1"), "serial device.unknown"],
    ["a load where there is none", lastReading.replace(",0,", ",12,"), "load_kg reading.load_in_zero_run"],
  ])("is refused whole for %s in its last row", async (_, last, expected) => {
    const file = fileOf(READINGS, readings(serials), last);
    const { status, body } = await send("runs", file, { purpose: "zero" });
    expect([status, body.code]).toEqual([422, "run.invalid"]);
    const { row, column, code } = body.errors[0];
    expect(`${row} ${column} ${code}`).toBe(`${LAST_ROW} ${expected}`);
    expect(await countRows()).toBe(before);
  });

  it("adds none of its devices where its last row contradicts the others", async () => {
    const fresh = readings(serialsOf("FRESH-"));
    const file = fileOf(READINGS, fresh, fresh.at(-1)?.replace(",0,", ",12,"));
    const { status, body } = await send("runs", file, { purpose: "zero", addDevices: true });
    expect([status, body.errors[0].row]).toEqual([422, LAST_ROW]);
    expect(await countRows()).toBe(before);
  });
});

describe("a long list of devices", () => {
  const long = serialsOf("LONG-");

  it("is refused whole where its last one belongs to another lot", async () => {
    const { status, body } = await api.call("POST", "/lots/OTHER/devices", {
      as: "engineer",
      body: { serials: [...long, serials.at(-1)] },
    });
    expect([status, body.code, body.count]).toEqual([409, "device.in_other_lot", 1]);
    expect(await countRows()).toBe(before);
  });
});
