/** What the pages of packages read beside the API: plans, what to compare with, provenance and the release record. */
import { beforeAll, describe, expect, it } from "vitest";
import { chooseAgainst } from "@/lib/services/packages/choose-against";
import { getPackageProvenance } from "@/lib/services/packages/get-provenance";
import { getReleaseRecord } from "@/lib/services/packages/get-release-record";
import { planPackage } from "@/lib/services/packages/plan-package";
import { withdrawPackage } from "@/lib/services/packages/release-package";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD } from "../support/people";
import { arrangeDerived, type DerivedLot } from "../support/scenario/derived";
import type { ScenarioPeople } from "../support/scenario/family-lot";
import { arrangeReleased, type BuiltPackage, buildGolden } from "../support/scenario/packaged";

let api: TestApi;
let people: ScenarioPeople;
let lot: DerivedLot;
let first: BuiltPackage;
let second: BuiltPackage;
let draft: BuiltPackage;

beforeAll(async () => {
  api = await openTestApi();
  people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  lot = await arrangeDerived(people);
  first = await arrangeReleased(people, lot);
  second = await arrangeReleased(people, lot);
  draft = await buildGolden(people, lot);
});

const hold = (serial: string, held: boolean) =>
  api.db.updateTable("device").set({ held }).where("serial", "=", serial).execute();

describe("the plan of a package", () => {
  it("says which devices would be packed and which layouts fit", async () => {
    const plan = await planPackage(api.ctx("engineer"), lot.lot);
    expect(plan).toMatchObject({ firmware: "2.3.0", devices: 28 });
    expect(plan.layouts).toEqual([{ version: "1.0.0", firmware: ">=2.1.0 <3.0.0", order: 1, fits: true }]);
    expect(plan.content[1]).toEqual({ packed: 28, leftOut: [], newerUndecided: 0, otherBoard: 0 });
  });

  it("names what is left out and why", async () => {
    const serial = `${lot.lot}-00011`;
    await hold(serial, true);
    const plan = await planPackage(api.ctx("engineer"), lot.lot);
    await hold(serial, false);
    expect(plan.content[1]).toMatchObject({ packed: 27, leftOut: [{ reason: "held", count: 1, serials: [serial] }] });
  });

  it("tells reviewers who may sign from those who had a hand in it", async () => {
    const signers = (await planPackage(api.ctx("engineer"), lot.lot)).signers;
    expect(signers).toEqual([
      { name: "reviewer", acts: [] },
      { name: "reviewer2", acts: [] },
    ]);
    // A reviewer who would build it could not sign it.
    const own = (await planPackage(api.ctx("reviewer"), lot.lot)).signers;
    expect(own.find((one) => one.name === "reviewer")?.acts).toEqual(["builds it"]);
  });

  it("of an unknown lot is refused", async () => {
    await expect(planPackage(api.ctx("engineer"), "NOWHERE")).rejects.toMatchObject({ code: "lot.not_found" });
  });
});

describe("what a package is compared with", () => {
  it("is what is live now, for a draft", async () => {
    expect(await chooseAgainst(api.ctx("auditor"), draft.id)).toMatchObject({
      reason: "live",
      chosen: { id: second.id, state: "live", liveSince: expect.any(String) },
    });
  });

  it("is what was live before it, for a release", async () => {
    expect(await chooseAgainst(api.ctx("auditor"), second.id)).toMatchObject({
      reason: "live-before",
      chosen: { id: first.id, state: "superseded" },
    });
  });

  it("is nothing for the first release", async () => {
    const { chosen, reason, others } = await chooseAgainst(api.ctx("auditor"), first.id);
    expect([chosen, reason]).toEqual([null, "none"]);
    expect(others.map((one) => one.id)).toEqual([draft.id, second.id]);
  });
});

describe("provenance", () => {
  it("names documents, runs, releases and ledger events by digest", async () => {
    const { family, layout, derivations, releases, files, events } = await getPackageProvenance(
      api.ctx("auditor"),
      second.id,
    );
    expect(family).toMatchObject({ code: "MW-20", revision: 1, sha256: expect.stringMatching(/^[0-9a-f]{64}$/) });
    expect(layout).toMatchObject({ version: "1.0.0", makers: ["engineer"] });
    expect(derivations).toHaveLength(1);
    expect(derivations[0]?.runs.map((run) => run.id).sort()).toEqual(Object.values(lot.runs).sort());
    expect(releases).toMatchObject([{ sequence: 2, kind: "release", by: "engineer" }]);
    expect(files.map((file) => file.name)).toEqual(["SHA256SUMS", "images.jsonl", "manifest.json"]);
    expect(events.at(-1)).toMatchObject({ action: "package.released", actorName: "engineer" });
  });
});

describe("the release record", () => {
  it("is what was signed", async () => {
    const { document, signature } = await getReleaseRecord(api.ctx("auditor"), second.id);
    const { body } = await api.call("GET", `/packages/${second.id}`, { as: "auditor" });
    expect(document).toMatchObject({ lot: lot.lot, version: second.version, package: body.digest, sequence: 2 });
    expect(signature).toMatch(/^[0-9a-f]{128}$/);
  });

  it("is none for what was never live", async () => {
    await expect(getReleaseRecord(api.ctx("auditor"), draft.id)).rejects.toMatchObject({ code: "release.not_found" });
  });

  it("stays after a withdrawal, which then is what the package was compared with no longer", async () => {
    await withdrawPackage(api.ctx("engineer"), { id: second.id, reason: "Recalled", password: PASSWORD });
    expect((await getReleaseRecord(api.ctx("auditor"), second.id)).document.sequence).toBe(2);
    const { releases } = await getPackageProvenance(api.ctx("auditor"), second.id);
    expect(releases.at(-1)).toMatchObject({ kind: "withdrawal", reason: "Recalled", keyId: null });
    expect(await chooseAgainst(api.ctx("auditor"), draft.id)).toMatchObject({
      reason: "built-before",
      chosen: { id: second.id, state: "withdrawn" },
    });
  });
});
