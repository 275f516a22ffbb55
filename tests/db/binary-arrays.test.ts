import fc from "fast-check";
import { sql } from "kysely";
import { beforeAll, describe, expect, it } from "vitest";
import { float8Array, int4Array, textArray, timestamptzArray, uuidArray } from "@/db/binary-arrays";
import { openTestDatabase, type TestDatabase } from "../support/database";

let database: TestDatabase;
beforeAll(async () => {
  database = await openTestDatabase();
});

/** What the server makes of an array: each element as JSON, in order. */
async function elements(array: Buffer, type: string): Promise<unknown[]> {
  const { rows } = await sql<{ list: unknown[] }>`
    select coalesce(json_agg(to_json(one) order by place), '[]') as list
    from unnest(${array}::${sql.raw(type)}[]) with ordinality as given(one, place)
  `.execute(database.db);
  return rows[0]?.list ?? [];
}

const nullable = <T>(of: fc.Arbitrary<T>) => fc.array(fc.option(of), { maxLength: 30 });
const RUNS = { numRuns: 40 };

describe("binary arrays", () => {
  it("are the integers, texts and UUIDs that the server unnests", async () => {
    await fc.assert(
      fc.asyncProperty(nullable(fc.integer({ min: -(2 ** 31), max: 2 ** 31 - 1 })), async (values) => {
        expect(await elements(int4Array(values), "int4")).toEqual(values);
      }),
      RUNS,
    );
    const text = fc.string({ unit: "grapheme" }).filter((one) => !one.includes("\0"));
    await fc.assert(
      fc.asyncProperty(nullable(text), async (values) => {
        expect(await elements(textArray(values), "text")).toEqual(values);
      }),
      RUNS,
    );
    await fc.assert(
      fc.asyncProperty(fc.array(fc.uuid(), { maxLength: 30 }), async (some) => {
        const values = some.flatMap((value) => [value, value, value]);
        expect(await elements(uuidArray(values), "uuid")).toEqual(values);
      }),
      RUNS,
    );
  });

  it("carry every double bit by bit", async () => {
    await fc.assert(
      fc.asyncProperty(nullable(fc.double({ noNaN: true, noDefaultInfinity: true })), async (values) => {
        const { rows } = await sql<{ bits: string | null }>`
          select encode(float8send(one), 'hex') as bits from unnest(${float8Array(values)}::float8[]) with ordinality as given(one, place) order by place
        `.execute(database.db);
        const sent = values.map((value) => {
          if (value === null) return null;
          const bits = Buffer.alloc(8);
          bits.writeDoubleBE(value);
          return bits.toString("hex");
        });
        expect(rows.map((row) => row.bits)).toEqual(sent);
      }),
      RUNS,
    );
  });

  it("carry times from 1970 to 2199 to the millisecond, before and after the server's epoch", async () => {
    const edges = ["1970-01-01T00:00:00.000Z", "1999-12-31T23:59:59.999Z", "2000-01-01T00:00:00.001Z"];
    const range = { min: new Date(0), max: new Date("2199-12-31T23:59:59.999Z"), noInvalidDate: true };
    await fc.assert(
      fc.asyncProperty(fc.array(fc.date(range), { maxLength: 30 }), async (dates) => {
        const times = [...edges, ...dates.map((date) => date.toISOString())];
        const { rows } = await sql<{ one: Date }>`
          select one from unnest(${timestamptzArray(times)}::timestamptz[]) with ordinality as given(one, place) order by place
        `.execute(database.db);
        expect(rows.map((row) => row.one.toISOString())).toEqual(times);
      }),
      RUNS,
    );
  });
});
