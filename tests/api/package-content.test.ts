import { beforeAll, describe, expect, it } from "vitest";
import { listNewestSets } from "@/db/queries/coefficients";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD } from "../support/people";
import {
  approveDerivation,
  arrangeDerived,
  arrangeSecondDerived,
  type DerivedLot,
  deriveGolden,
} from "../support/scenario/derived";
import { publishLayout, type ScenarioPeople } from "../support/scenario/family-lot";
import { buildGolden } from "../support/scenario/packaged";

let api: TestApi;
let people: ScenarioPeople;
let first: DerivedLot;
let second: DerivedLot;

beforeAll(async () => {
  api = await openTestApi();
  people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  first = await arrangeDerived(people);
  second = await arrangeSecondDerived(people);
});

const ask = (lot: string, body: object, as: "engineer" | "engineer2" = "engineer") =>
  api.call("POST", `/lots/${lot}/packages`, { as, body });
const get = async (id: string) => (await api.call("GET", `/packages/${id}`, { as: "engineer" })).body;
const hold = (serial: string, held: boolean) =>
  api.db.updateTable("device").set({ held }).where("serial", "=", serial).execute();

describe("version numbers", () => {
  it("begin with 1.0.0 and rise by a patch, or by what is asked for", async () => {
    const versions: string[] = [];
    for (const step of [undefined, undefined, "minor", "major", "patch"] as const)
      versions.push((await buildGolden(people, first, { step })).version);
    expect(versions).toEqual(["1.0.0", "1.0.1", "1.1.0", "2.0.0", "2.0.1"]);
  });

  it("are two for two builds at once", async () => {
    const [a, b] = await Promise.all([
      ask(first.lot, { layout: "1.0.0" }),
      ask(first.lot, { layout: "1.0.0" }, "engineer2"),
    ]);
    expect([a.status, b.status]).toEqual([202, 202]);
    expect(a.body.version).not.toBe(b.body.version);
    await api.runJobs();
    expect((await get(a.body.id)).state).toBe("draft");
    expect((await get(b.body.id)).state).toBe("draft");
  });

  it("rise by a minor where the devices changed", async () => {
    const before = await buildGolden(people, first);
    await hold("MW20-2609-00005", true);
    const held = await buildGolden(people, first);
    const [major, minor] = before.version.split(".").map(Number) as [number, number];
    expect(held.version).toBe(`${major}.${minor + 1}.0`);
    const body = await get(held.id);
    expect(body.counts).toMatchObject({ devices: 27, lotDevices: 28, leftOut: { held: 1 } });
    expect(body.checks[0]).toMatchObject({
      code: "coverage",
      verdict: "warn",
      message: "27 of 28 devices are packed. Left out: 1 held (MW20-2609-00005).",
    });
    await hold("MW20-2609-00005", false);
  });

  it("rise by a major where the layout's major changed, and a failed build's number is not used again", async () => {
    const source = JSON.parse(first.layout);
    // A gain beyond this limit can't be stored: the build fails and names device and field.
    source.fields.find((field: { name: string }) => field.name === "gain").max = 1.0001;
    source.version = "2.0.0";
    await publishLayout(people, JSON.stringify(source));
    const failed = await buildGolden(people, first, { layout: "2.0.0", step: "major" });
    const body = await get(failed.id);
    expect(body).toMatchObject({
      state: "failed",
      digest: null,
      checks: [],
      failure: {
        code: "image.limit_exceeded",
        field: "gain",
        serial: expect.stringMatching(/^MW20-2609-/),
        limit: 1.0001,
      },
    });
    expect(body.failure.value).toBeGreaterThan(1.0001);
    expect(body.failure.message).toContain(`gain = ${body.failure.value} is above the limit 1.0001`);
    for (const table of ["image", "packageFile", "packageCheck", "packageDerivation"] as const) {
      expect(await api.db.selectFrom(table).select("packageId").where("packageId", "=", failed.id).execute()).toEqual(
        [],
      );
    }
    const next = await buildGolden(people, first, { layout: "2.0.0" });
    const [major] = failed.version.split(".").map(Number) as [number];
    expect(next.version).toBe(`${major}.0.1`);
  });
});

describe("what a package takes", () => {
  it("names who was excluded from the derivation", async () => {
    const { id } = await buildGolden(people, second);
    const body = await get(id);
    expect(body.counts).toMatchObject({ devices: 14, lotDevices: 15, leftOut: { excluded: 1 } });
    expect(body.checks[0].message).toBe(
      "14 of 15 devices are packed. Left out: 1 excluded from the derivation (MW300-2610-00003).",
    );
  });

  it("keeps the approved set while a newer one waits, and says so; takes the newer once it is approved", async () => {
    const newer = await deriveGolden(people, first);
    const waiting = await buildGolden(people, first);
    const body = await get(waiting.id);
    expect(body.derivations).toEqual([first.derivation]);
    expect(body.checks[0]).toMatchObject({
      code: "coverage",
      verdict: "warn",
      evidence: { newerUndecided: { count: 28 } },
    });
    await approveDerivation(people, newer.derivation);
    const taken = await buildGolden(people, first);
    expect(await get(taken.id)).toMatchObject({ derivations: [newer.derivation], counts: { devices: 28 } });
  });

  it("leaves out revoked and scrapped devices", async () => {
    const lot = await api.db.selectFrom("lot").select("id").where("code", "=", first.lot).executeTakeFirstOrThrow();
    const [newest] = await listNewestSets(api.db, lot.id, { serial: "MW20-2609-00009" });
    await api.call("POST", `/derivations/${newest?.derivationId}/decisions`, {
      as: "reviewer",
      body: { decision: "revoke", serials: ["MW20-2609-00009"], reason: "Reader was off", password: PASSWORD },
    });
    await api.db.updateTable("device").set({ scrapped: true }).where("serial", "=", "MW20-2609-00010").execute();
    const { id } = await buildGolden(people, first);
    const body = await get(id);
    expect(body.counts.leftOut).toEqual({ revoked: 1, scrapped: 1 });
    expect(body.checks[0].message).toBe(
      "26 of 28 devices are packed. Left out: 1 scrapped (MW20-2609-00010); 1 with revoked coefficients (MW20-2609-00009).",
    );
  });
});
