import { sql } from "kysely";
import { v7 as uuidv7 } from "uuid";
import { beforeAll, describe, expect, it } from "vitest";
import { insertApproval, type NewApproval } from "@/db/queries/approvals";
import { insertWaiver } from "@/db/queries/checks";
import { insertMakers } from "@/db/queries/makers";
import { getPackage, movePackage, type PackageMove } from "@/db/queries/packages";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD, type PersonName } from "../support/people";
import { arrangeDerived, arrangeSecondDerived, type DerivedLot } from "../support/scenario/derived";
import type { ScenarioPeople } from "../support/scenario/family-lot";
import { arrangeApproved, arrangeReleased, arrangeSubmitted, buildGolden } from "../support/scenario/packaged";

let api: TestApi;
let people: ScenarioPeople;
let first: DerivedLot;
let second: DerivedLot;

beforeAll(async () => {
  api = await openTestApi();
  people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  first = await arrangeDerived(people);
  second = await arrangeSecondDerived(people);
  // The maker holds the role that decides: what refuses them is the evidence, not a missing role.
  const { id: personId } = api.people.engineer;
  const at = new Date();
  const grant = { id: uuidv7(), personId, role: "reviewer", askedAt: at, confirmedAt: at };
  await api.owner.insertInto("roleGrant").values(grant).execute();
});

const asApp = <T>(work: Parameters<ReturnType<TestApi["db"]["transaction"]>["execute"]>[0]) =>
  api.db.transaction().execute(work) as Promise<T>;
const move = (id: string, change: PackageMove) => asApp((trx) => movePackage(trx, id, change));
const update = (id: string, values: object) => api.db.updateTable("package").set(values).where("id", "=", id).execute();
const stateOf = async (id: string) => (await getPackage(api.db, id)).state;

async function approvalOf(packageId: string, by: PersonName, change: Partial<NewApproval> = {}): Promise<NewApproval> {
  const { reviewDigest } = await getPackage(api.db, packageId);
  return {
    id: uuidv7(),
    subjectKind: "package",
    subjectId: packageId,
    decision: "approve",
    personId: api.people[by].id,
    personName: by,
    meaning: "test",
    reason: null,
    digest: reviewDigest,
    serialCount: null,
    at: new Date(),
    ...change,
  };
}

const approve = (approval: NewApproval) => asApp((trx) => insertApproval(trx, approval));

describe("decisions, with SQL as the app's role", () => {
  it("of a maker with their own id are refused, whatever roles they hold", async () => {
    const { id } = await arrangeSubmitted(people, first);
    await expect(approve(await approvalOf(id, "engineer"))).rejects.toThrow("package.self_approval");
    await expect(approve(await approvalOf(id, "engineer2"))).rejects.toThrow("auth.forbidden");
    await expect(approve(await approvalOf(id, "reviewer", { digest: Buffer.alloc(32) }))).rejects.toThrow(
      "package.changed",
    );
    await expect(move(id, { state: "approved" })).rejects.toThrow("package.not_approved");
    expect(await api.db.selectFrom("approval").select("id").where("subjectId", "=", id).execute()).toEqual([]);
    expect(await stateOf(id)).toBe("in-review");
  });

  it("count for what was submitted last only", async () => {
    const { id } = await arrangeSubmitted(people, first);
    const old = await approvalOf(id, "reviewer", { at: new Date(Date.now() - 60_000) });
    await approve(old);
    await expect(move(id, { state: "approved" })).rejects.toThrow("package.not_approved");
  });

  it("need the package in review", async () => {
    const { id } = await buildGolden(people, first);
    const digest = Buffer.alloc(32, 1);
    await expect(approve(await approvalOf(id, "reviewer", { digest }))).rejects.toThrow("package.wrong_state");
    const elsewhere = { ...(await approvalOf(id, "reviewer", { digest })), subjectId: uuidv7() };
    await expect(approve(elsewhere)).rejects.toThrow("package.not_found");
  });

  it("of one who lost the role or the account are refused", async () => {
    const { id } = await arrangeSubmitted(people, first);
    const { id: personId } = api.people.reviewer2;
    await api.owner.updateTable("person").set({ active: false }).where("id", "=", personId).execute();
    await expect(approve(await approvalOf(id, "reviewer2"))).rejects.toThrow("auth.forbidden");
    await api.owner.updateTable("person").set({ active: true }).where("id", "=", personId).execute();
  });
});

describe("waivers, with SQL as the app's role", () => {
  it("of a maker, of a check that is no warning, and after the draft are refused", async () => {
    const { id } = await buildGolden(people, second);
    const waiver = (by: PersonName, checkCode = "coverage") =>
      asApp((trx) => insertWaiver(trx, id, waiverOf(by, checkCode)));
    await expect(waiver("engineer")).rejects.toThrow("package.self_approval");
    await expect(waiver("engineer2")).rejects.toThrow("auth.forbidden");
    await expect(waiver("reviewer", "limits")).rejects.toThrow("check.not_waivable");
    await expect(waiver("reviewer", "other")).rejects.toThrow("check.not_found");
    await expect(move(id, { state: "in-review" })).rejects.toThrow("package.not_waived");
    await waiver("reviewer");
    await move(id, { state: "in-review", submittedAt: new Date(), submittedBy: api.people.engineer.id });
    await expect(waiver("reviewer2")).rejects.toThrow("package.wrong_state");
  });

  const waiverOf = (by: PersonName, checkCode: string) => ({
    id: uuidv7(),
    checkCode,
    personId: api.people[by].id,
    personName: by,
    reason: "test",
    at: new Date(),
  });
});

describe("a built package", () => {
  it("keeps its content, version and inputs", async () => {
    const { id } = await buildGolden(people, first);
    await expect(update(id, { digest: Buffer.alloc(32) })).rejects.toThrow("package.immutable");
    await expect(update(id, { version: "9.9.9", versionMajor: 9 })).rejects.toThrow("package.immutable");
    await expect(update(id, { notes: "other" })).rejects.toThrow("package.immutable");
    await expect(update(id, { createdBy: api.people.reviewer.id })).rejects.toThrow("package.immutable");
  });

  it("takes no further image, file, check or derivation", async () => {
    const { id } = await buildGolden(people, first);
    const insert = (table: string, values: ReturnType<typeof sql>) =>
      sql`insert into ${sql.table(table)} ${values}`.execute(api.db);
    const copyOf = sql`select package_id, uuidv, serial, coefficient_set_id, hardware_id, bytes, sha256, hex_sha256
      from image, gen_random_uuid() uuidv where package_id = ${id}::uuid limit 1`;
    await expect(insert("image", copyOf)).rejects.toThrow("package.immutable");
    await expect(insert("package_file", sql`values (${id}, 'x', '', '')`)).rejects.toThrow("package.immutable");
    await expect(insert("package_check", sql`values (${id}, 9, 'x', 'pass', 'x')`)).rejects.toThrow(
      "package.immutable",
    );
    const derivation = sql`values (${id}, ${second.derivation})`;
    await expect(insert("package_derivation", derivation)).rejects.toThrow("package.immutable");
  });

  it("moves only as the states allow", async () => {
    const { id } = await buildGolden(people, first);
    for (const state of ["building", "approved", "live", "superseded", "withdrawn"] as const)
      await expect(move(id, { state })).rejects.toThrow("package.wrong_state");
    const [row] = await api.db.selectFrom("package").selectAll().where("id", "=", id).execute();
    const copy = { ...row, id: uuidv7(), version: "8.0.0", versionMajor: 8, versionMinor: 0, versionPatch: 0 };
    const values = { ...copy, counts: "{}", failure: null, rebuild: null } as never;
    await expect(api.db.insertInto("package").values(values).execute()).rejects.toThrow("package.wrong_state");
  });

  it("freezes the evidence of its makers when it is submitted", async () => {
    const { id } = await arrangeSubmitted(people, first);
    const maker = {
      id: uuidv7(),
      subjectKind: "package" as const,
      subjectId: id,
      personId: api.people.reviewer.id,
      act: "built" as const,
      at: new Date(),
    };
    await expect(asApp((trx) => insertMakers(trx, [maker]))).rejects.toThrow("package.makers_frozen");
    await expect(sql`delete from maker where subject_id = ${id}`.execute(api.db)).rejects.toThrow(/permission denied/);
  });
});

describe("what is live", () => {
  it("is one package a lot", async () => {
    await arrangeReleased(people, first);
    const { id } = await arrangeApproved(people, first);
    await expect(move(id, { state: "live" })).rejects.toThrow("package_one_live");
  });

  it("counts up by one at every change, and never back", async () => {
    const { id } = await arrangeReleased(people, first);
    const { lotId } = await getPackage(api.db, id);
    const { sequence } = await api.db
      .selectFrom("lot")
      .select("sequence")
      .where("id", "=", lotId)
      .executeTakeFirstOrThrow();
    const period = (next: number) => ({
      id: uuidv7(),
      lotId,
      sequence: next,
      kind: "withdrawal",
      packageId: id,
      personId: api.people.engineer.id,
      startedAt: new Date(),
    });
    for (const wrong of [sequence, sequence + 2, 1])
      await expect(api.db.insertInto("livePeriod").values(period(wrong)).execute()).rejects.toThrow(
        "lot.sequence_falls",
      );
    const fall = api.db
      .updateTable("lot")
      .set({ sequence: sequence - 1 })
      .where("id", "=", lotId)
      .execute();
    await expect(fall).rejects.toThrow("lot.sequence_falls");
    const unsigned = { ...period(sequence + 1), kind: "release" };
    await expect(api.db.insertInto("livePeriod").values(unsigned).execute()).rejects.toThrow("live_period_signed");
  });

  it("does not come back without a granted request", async () => {
    const older = await arrangeReleased(people, first);
    const newer = await arrangeReleased(people, first);
    await expect(
      asApp(async (trx) => {
        await movePackage(trx, newer.id, { state: "superseded" });
        await movePackage(trx, older.id, { state: "live" });
      }),
    ).rejects.toThrow("package.not_approved");
    expect([await stateOf(older.id), await stateOf(newer.id)]).toEqual(["superseded", "live"]);
  });
});

it.each([
  "image",
  "package_file",
  "package_check",
  "package_derivation",
  "waiver",
  "live_period",
  "bundle",
  "bundle_chunk",
  "approval",
  "maker",
])("%s can't be changed or emptied, also by the owner", async (table) => {
  await expect(sql`delete from ${sql.table(table)}`.execute(api.db)).rejects.toThrow(/permission denied/);
  await expect(sql`truncate ${sql.table(table)} cascade`.execute(api.owner)).rejects.toThrow("database.append_only");
});
