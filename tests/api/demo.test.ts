/** The demo as a first start makes it: lots in every stage, told through the services, so that the ledger is true. */

import { mkdtempSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import type { Db } from "@/db/executor";
import { seedDemo } from "@/lib/demo/seed";
import { setEnv } from "@/lib/env";
import { verifyLedger } from "@/lib/services/ledger/verify-ledger";
import { openTestDatabase } from "../support/database";
import { systemContext } from "../support/jobs";

const home = mkdtempSync(join(tmpdir(), "trimwright-demo-"));
afterAll(() => rmSync(home, { recursive: true, force: true }));

let db: Db;
beforeAll(async () => {
  const database = await openTestDatabase();
  db = database.db;
  setEnv({ DATABASE_URL: database.appUrl, TRIMWRIGHT_HOME: home });
  await seedDemo(db, () => undefined);
}, 180_000);

describe("the demo", () => {
  it("has packages in every stage that a person can meet", async () => {
    const rows = await db.selectFrom("package").select("state").distinct().execute();
    const states = rows.map((row) => row.state).sort();
    expect(states).toEqual(["approved", "draft", "failed", "in-review", "live", "superseded", "withdrawn"]);
  });

  it("has a lot of 2,000 devices, most of them written and verified, and some that went wrong", async () => {
    const rows = await db
      .selectFrom("writeRecord")
      .innerJoin("device", "device.id", "writeRecord.deviceId")
      .innerJoin("lot", "lot.id", "device.lotId")
      .where("lot.code", "=", "MW20-2601")
      .select(({ fn }) => ["writeRecord.outcome", fn.countAll<string>().as("count")])
      .groupBy("writeRecord.outcome")
      .execute();
    const counts = Object.fromEntries(rows.map((row) => [row.outcome, Number(row.count)]));
    expect(counts).toEqual({ verified: 1677, mismatch: 2, interrupted: 1, failed: 1 });
  });

  it("leaves coefficients, a layout and a reinstatement to a second person", async () => {
    const count = async (table: "derivation" | "layout" | "reinstatement", state: string) =>
      (await db.selectFrom(table).select("id").where("state", "=", state).execute()).length;
    expect(await count("derivation", "proposed")).toBe(1);
    expect(await count("layout", "in-review")).toBe(1);
    expect(await count("reinstatement", "asked")).toBe(1);
  });

  it("has a ledger that verifies, of events that lie in the past", async () => {
    expect(await verifyLedger(systemContext(db))).toMatchObject({ ok: true });
    const last = await db.selectFrom("ledgerEvent").select("at").orderBy("seq", "desc").executeTakeFirstOrThrow();
    expect(last.at.getTime()).toBeLessThanOrEqual(Date.now());
  });
});
