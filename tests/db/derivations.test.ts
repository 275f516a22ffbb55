import { v7 as uuidv7 } from "uuid";
import { beforeAll, describe, expect, it } from "vitest";
import { insertApproval, type NewApproval } from "@/db/queries/approvals";
import { listNewestSets, updateSetStates } from "@/db/queries/coefficients";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD } from "../support/people";
import { type DerivedLot, deriveGolden, uploadGoldenRuns } from "../support/scenario/derived";
import { arrangeFamilyLot, type ScenarioPeople } from "../support/scenario/family-lot";

let api: TestApi;
let derived: DerivedLot;

beforeAll(async () => {
  api = await openTestApi();
  const people: ScenarioPeople = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  derived = await deriveGolden(people, await uploadGoldenRuns(people, await arrangeFamilyLot(people)));
});

const sets = () =>
  api.db.selectFrom("coefficientSet").select(["id", "state"]).where("derivationId", "=", derived.derivation);

async function approvalBy(name: "engineer" | "reviewer", change: Partial<NewApproval> = {}): Promise<NewApproval> {
  const { sha256 } = await api.db
    .selectFrom("derivation")
    .select("sha256")
    .where("id", "=", derived.derivation)
    .executeTakeFirstOrThrow();
  return {
    id: uuidv7(),
    subjectKind: "derivation",
    subjectId: derived.derivation,
    decision: "approve",
    personId: api.people[name].id,
    personName: name,
    meaning: "test",
    reason: null,
    digest: sha256,
    serialCount: null,
    at: new Date(),
    ...change,
  };
}

const approve = (approval: NewApproval) => api.db.transaction().execute((trx) => insertApproval(trx, approval));

describe("what the database refuses whatever the code does", () => {
  it("approval of a set without a decision", async () => {
    const { id } = await sets().executeTakeFirstOrThrow();
    const move = api.db.transaction().execute((trx) => updateSetStates(trx, [id], "approved", new Date()));
    await expect(move).rejects.toThrow("coefficients.not_approved");
  });

  it.each([
    ["uncertainty budget", { uncertainty: JSON.stringify({}) }],
    ["envelope survey", { envelope: null }],
  ])("another %s once a derivation is proposed", async (_, change) => {
    const update = api.db.updateTable("derivation").set(change).where("id", "=", derived.derivation);
    await expect(update.execute()).rejects.toThrow("derivation.immutable");
    const row = await api.db
      .selectFrom("derivation")
      .select(["uncertainty", "envelope"])
      .where("id", "=", derived.derivation)
      .executeTakeFirstOrThrow();
    expect(row.uncertainty).toMatchObject({ level: 0.9545 });
    expect(row.envelope).toMatchObject({ notProvenC: [] });
  });

  it("a decision by someone without the role, by a maker, or over another digest", async () => {
    await expect(approve(await approvalBy("engineer"))).rejects.toThrow("auth.forbidden");
    const maker = {
      id: uuidv7(),
      subjectKind: "derivation",
      subjectId: derived.derivation,
      personId: api.people.reviewer2.id,
      act: "uploaded",
      at: new Date(),
    };
    await api.db.insertInto("maker").values(maker).execute();
    const own = await approvalBy("reviewer", { personId: api.people.reviewer2.id });
    await expect(approve(own)).rejects.toThrow("derivation.self_approval");
    await expect(approve(await approvalBy("reviewer", { digest: Buffer.alloc(32) }))).rejects.toThrow(
      "derivation.changed",
    );
    expect(
      await api.db.selectFrom("approval").select("id").where("subjectId", "=", derived.derivation).execute(),
    ).toEqual([]);
  });

  it("a changed value, a changed result, and moves that are none", async () => {
    const { id } = await sets().executeTakeFirstOrThrow();
    const change = (values: object) => api.db.updateTable("coefficientSet").set(values).where("id", "=", id).execute();
    await expect(change({ gain: 1 })).rejects.toThrow("coefficients.immutable");
    await expect(change({ detail: "{}" })).rejects.toThrow("coefficients.immutable");
    await expect(change({ state: "revoked" })).rejects.toThrow("coefficients.wrong_state");
    const derivation = api.db
      .updateTable("derivation")
      .set({ provenLowC: -40 })
      .where("id", "=", derived.derivation)
      .execute();
    await expect(derivation).rejects.toThrow("derivation.immutable");
  });

  it.each([
    "run",
    "run_file",
    "run_finding",
    "reading",
    "derivation_run",
    "derivation_finding",
    "derivation_exclusion",
    "import_file",
    "acknowledgement",
  ])("changes to %s, also by the owner", async (table) => {
    const { sql } = await import("kysely");
    await expect(sql`delete from ${sql.table(table)}`.execute(api.db)).rejects.toThrow(/permission denied/);
    await expect(sql`truncate ${sql.table(table)} cascade`.execute(api.owner)).rejects.toThrow("database.append_only");
  });
});

it("takes the newest derivation's set of each device, of any state or of those asked for", async () => {
  const { id: lotId } = await api.db
    .selectFrom("lot")
    .select("id")
    .where("code", "=", derived.lot)
    .executeTakeFirstOrThrow();
  await approve(await approvalBy("reviewer"));
  const ids = (await sets().execute()).map((set) => set.id);
  await api.db.transaction().execute((trx) => updateSetStates(trx, ids, "approved", new Date()));
  const people: ScenarioPeople = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  const second = await deriveGolden(people, derived, [{ serial: "MW20-2609-00001", reason: "test" }]);
  const newest = await listNewestSets(api.db, lotId);
  expect(newest).toHaveLength(28);
  expect(newest[0]).toMatchObject({
    serial: "MW20-2609-00001",
    derivationId: derived.derivation,
    state: "approved",
    order: 1,
  });
  expect(newest[1]).toMatchObject({ derivationId: second.derivation, state: "proposed" });
  const approved = await listNewestSets(api.db, lotId, { states: ["approved"] });
  expect(new Set(approved.map((set) => set.derivationId))).toEqual(new Set([derived.derivation]));
});
