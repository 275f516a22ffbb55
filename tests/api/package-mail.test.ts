import { beforeAll, describe, expect, it } from "vitest";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD } from "../support/people";
import { arrangeDerived, type DerivedLot } from "../support/scenario/derived";
import type { ScenarioPeople } from "../support/scenario/family-lot";
import { buildGolden, submitBuilt } from "../support/scenario/packaged";

let api: TestApi;
let people: ScenarioPeople;
let lot: DerivedLot;

beforeAll(async () => {
  api = await openTestApi();
  people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  lot = await arrangeDerived(people);
});

const mailsOf = (template: string) =>
  api.db
    .selectFrom("mail")
    .select(["toAddress", "subject", "body"])
    .where("template", "=", template)
    .orderBy("toAddress")
    .execute();

describe("mail about a package", () => {
  it("goes to the reviewers who may decide when it is submitted, and to who submitted it when it is refused", async () => {
    const built = await buildGolden(people, lot);
    await submitBuilt(people, built);
    const asked = await mailsOf("package-submitted");
    expect(asked.map((one) => one.toAddress)).toEqual(["reviewer2@marram.example", "reviewer@marram.example"].sort());
    expect(asked[0]?.subject).toBe(`Package ${built.version} of ${lot.lot} waits for review`);
    expect(asked[0]?.body).toContain(`/packages/${built.id}/review`);
    const { reviewDigest } = (await api.call("GET", `/packages/${built.id}`, { as: "reviewer" })).body;
    const body = { decision: "refuse", reviewDigest, reason: "Sensor S-2 had drifted", password: PASSWORD };
    expect((await api.call("POST", `/packages/${built.id}/decisions`, { as: "reviewer", body })).status).toBe(200);
    expect(await mailsOf("package-refused")).toEqual([
      {
        toAddress: "engineer@marram.example",
        subject: `Package ${built.version} of ${lot.lot} was refused`,
        body: expect.stringContaining("Sensor S-2 had drifted"),
      },
    ]);
  });

  it("is not written where submitting or refusing is refused", async () => {
    const built = await buildGolden(people, lot);
    await submitBuilt(people, built);
    const before = (await mailsOf("package-submitted")).length + (await mailsOf("package-refused")).length;
    expect((await api.call("POST", `/packages/${built.id}/submit`, { as: "engineer" })).status).toBe(409);
    const body = { decision: "refuse", reviewDigest: "0".repeat(64), reason: "No", password: PASSWORD };
    expect((await api.call("POST", `/packages/${built.id}/decisions`, { as: "reviewer", body })).status).toBe(409);
    expect((await mailsOf("package-submitted")).length + (await mailsOf("package-refused")).length).toBe(before);
  });

  it("leaves out reviewers who had a hand in it and people who are gone", async () => {
    await api.db.updateTable("person").set({ active: false }).where("email", "=", "reviewer2@marram.example").execute();
    const built = await buildGolden(people, lot);
    await submitBuilt(people, built);
    const asked = (await mailsOf("package-submitted")).filter((one) => one.body.includes(built.id));
    expect(asked.map((one) => one.toAddress)).toEqual(["reviewer@marram.example"]);
  });
});
