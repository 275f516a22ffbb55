import { beforeAll, describe, expect, it } from "vitest";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD, type PersonName } from "../support/people";
import { arrangeFamilyLot, type ScenarioPeople } from "../support/scenario/family-lot";

let api: TestApi;
let lot: string;

beforeAll(async () => {
  api = await openTestApi();
  const people: ScenarioPeople = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  lot = (await arrangeFamilyLot(people)).lot;
});

const HEADER = "serial,tempOffset,tempSlope,zero,zeroTc,gain,gainTc";
const row = (n: number, gain = "0.996") =>
  `MW20-2609-${String(n).padStart(5, "0")},-231.9,0.1246,-0.0139,6.9e-06,${gain},-0.00041`;
const look = (body: string, query: object = {}, as: PersonName | undefined = "engineer") =>
  api.call("POST", `/lots/${lot}/coefficients`, {
    as,
    body,
    query: { referenceC: 20, capacityKg: 20, preview: true, ...query },
    headers: { "content-type": "text/csv" },
  });
const stored = async () => (await api.db.selectFrom("derivation").select("id").execute()).length;
const mails = async () => (await api.db.selectFrom("mail").select("id").execute()).length;

describe("looking at a file of coefficients before importing it", () => {
  it("shows rows as they stand, what would be found, and stores nothing", async () => {
    const csv = [HEADER, ...Array.from({ length: 12 }, (_, i) => row(i + 1, i === 3 ? "1.4" : "0.996"))].join("\n");
    const { status, body } = await look(csv);
    expect(status, JSON.stringify(body)).toBe(200);
    expect(body).toMatchObject({ preview: true, devices: 12, rowCount: 12, order: 1, errorCount: 0, errors: [] });
    expect(body.columns).toEqual(HEADER.split(","));
    expect(body.rows[0]).toEqual({ row: 2, cells: row(1).split(",") });
    expect(body.rows).toHaveLength(8);
    expect(body.findings.map((one: { code: string }) => one.code)).toContain("import.not_measured");
    expect([await stored(), await mails()]).toEqual([0, 0]);
  });

  it("brings every row with an error along, however far down it stands", async () => {
    const rows = Array.from({ length: 20 }, (_, i) => row(i + 1));
    rows[17] = row(18, "nothing");
    rows[18] = row(99);
    const { status, body } = await look([HEADER, ...rows].join("\n"));
    expect(status).toBe(200);
    expect(body.errorCount).toBe(2);
    expect(body.errors).toEqual(
      expect.arrayContaining([
        expect.objectContaining({ row: 19, column: "gain", code: "reading.not_a_number" }),
        expect.objectContaining({ row: 20, column: "serial", code: "device.unknown" }),
      ]),
    );
    expect(body.rows.slice(-2).map((one: { row: number }) => one.row)).toEqual([19, 20]);
    expect(await stored()).toBe(0);
  });

  it("answers a file that is none with its errors, not with a fault", async () => {
    for (const bytes of ["", "\ufffd\u0000", `${HEADER}\n"open`, "a,b\n1,2"]) {
      const { status, body } = await look(bytes);
      expect(status, JSON.stringify(body)).toBe(200);
      expect(body.errorCount).toBeGreaterThan(0);
    }
    expect(await stored()).toBe(0);
  });

  it("refuses another base, other roles and nobody, as the import does", async () => {
    const csv = `${HEADER}\n${row(1)}`;
    const other = await look(csv, { capacityKg: 30 });
    expect([other.status, other.body.code]).toEqual([409, "coefficients.reference_differs"]);
    expect((await look(csv, {}, "reviewer")).status).toBe(403);
    expect(
      (
        await api.call("POST", `/lots/${lot}/coefficients`, {
          body: csv,
          query: { referenceC: 20, capacityKg: 20, preview: true },
          headers: { "content-type": "text/csv" },
        })
      ).status,
    ).toBe(401);
    expect(
      (
        await api.call("POST", "/lots/NOWHERE/coefficients", {
          as: "engineer",
          body: csv,
          query: { referenceC: 20, capacityKg: 20, preview: true },
          headers: { "content-type": "text/csv" },
        })
      ).status,
    ).toBe(404);
  });
});
