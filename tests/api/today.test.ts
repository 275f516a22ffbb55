import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD, type PersonName } from "../support/people";
import { approveDerivation, type DerivedLot, deriveGolden, uploadGoldenRuns } from "../support/scenario/derived";
import { arrangeFamilyLot, type ScenarioPeople } from "../support/scenario/family-lot";
import { firstGolden } from "../support/scenario/golden";
import {
  approveSubmitted,
  arrangeReleased,
  type BuiltPackage,
  buildGolden,
  releaseApproved,
  submitBuilt,
} from "../support/scenario/packaged";
import { arrangeStation, reportOf, sendWrites, type TestStation } from "../support/scenario/station";

let api: TestApi;
let people: ScenarioPeople;
let derived: DerivedLot;
let built: BuiltPackage;
let station: TestStation;

const LOT = "MW20-2609";
const serial = (n: number) => `${LOT}-${String(n).padStart(5, "0")}`;
type Item = { kind: string; title: string; detail: string | null; who: string | null; tone: string; link: string };
const today = async (as: PersonName) => (await api.call("GET", "/today", { as })).body;
const titles = async (as: PersonName, list: string): Promise<string[]> =>
  (await today(as))[list].map((item: Item) => item.title);

beforeAll(async () => {
  api = await openTestApi();
  people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
}, 60_000);
afterAll(() => api.close());

// One lot is walked from nothing to written: each test begins where the one before it ended.
describe("GET /today, along the life of a lot", () => {
  it("is empty where nothing happened, for everybody", async () => {
    for (const as of ["engineer", "reviewer", "operator", "service", "auditor", "admin"] as const) {
      const { status, body } = await api.call("GET", "/today", { as });
      expect(status).toBe(200);
      expect(Object.values(body).flat()).toEqual([]);
    }
  });

  it("shows a draft to who wrote it, and once submitted to reviewers", async () => {
    const { family } = firstGolden();
    await api.call("POST", "/families", { as: "engineer", body: { ...family, code: "DRAFT" } });
    expect((await today("engineer")).own).toMatchObject([
      {
        kind: "family-revision",
        title: "Family DRAFT, revision 1",
        detail: "draft, not submitted",
        link: "/families/DRAFT?revision=1",
      },
    ]);
    expect(await titles("engineer2", "own")).toEqual([]);
    expect(await titles("reviewer", "decide")).toEqual([]);
    await api.call("POST", "/families/DRAFT/revisions/1/submit", { as: "engineer" });
    expect(await titles("engineer", "own")).toEqual([]);
    expect((await today("reviewer")).decide).toMatchObject([
      { kind: "family-revision", who: "engineer", tone: "wait" },
    ]);
  });

  it("tells who wrote it why it was refused", async () => {
    const body = { decision: "refuse", reason: "soak is too short", password: PASSWORD };
    await api.call("POST", "/families/DRAFT/revisions/1/decisions", { as: "reviewer", body });
    expect((await today("engineer")).own).toMatchObject([
      { detail: "refused: soak is too short", who: "reviewer", tone: "bad" },
    ]);
    expect(await titles("reviewer", "decide")).toEqual([]);
  });

  it("leads a lot from one step to the next", async () => {
    const golden = await arrangeFamilyLot(people);
    const step = async () => (await today("auditor")).lots[0];
    expect(await step()).toMatchObject({
      title: LOT,
      detail: "MW-20 · Readings: no run yet",
      link: `/lots/${LOT}/readings`,
    });
    const read = await uploadGoldenRuns(people, golden);
    expect(await step()).toMatchObject({
      detail: "MW-20 · Coefficients: none derived",
      link: `/lots/${LOT}/coefficients`,
    });
    derived = await deriveGolden(people, read);
    expect((await step()).detail).toContain("waits for a second person");
  });

  it("asks reviewers for coefficients that they did not make", async () => {
    expect((await today("reviewer")).decide).toMatchObject([
      {
        kind: "derivation",
        title: `Coefficients of ${LOT}`,
        detail: "28 devices · to be approved",
        link: `/derivations/${derived.derivation}`,
      },
    ]);
    expect(await titles("engineer", "decide")).toEqual([]);
    await approveDerivation(people, derived.derivation);
    expect(await titles("reviewer", "decide")).toEqual([]);
    expect((await today("auditor")).lots[0].detail).toContain("Package: none built");
  });

  it("shows a built package to its builder, its warnings and then its review to reviewers", async () => {
    built = await buildGolden(people, derived);
    const package_ = `Package ${LOT} 1.0.0`;
    expect((await today("engineer")).own.find((item: Item) => item.kind === "package")).toMatchObject({
      title: package_,
      detail: "draft, not submitted · 28 devices",
      link: `/packages/${built.id}`,
    });
    const { checks } = (await api.call("GET", `/packages/${built.id}`, { as: "reviewer" })).body;
    const warned = checks.filter((check: { verdict: string }) => check.verdict === "warn").length;
    const waivers = (await today("reviewer")).decide.filter((item: Item) => item.kind === "waiver");
    expect(waivers).toHaveLength(warned > 0 ? 1 : 0);
    await submitBuilt(people, built);
    expect((await today("reviewer2")).decide).toMatchObject([
      { kind: "package", title: package_, detail: "28 devices · in review" },
    ]);
    expect((await titles("engineer", "own")).includes(package_)).toBe(false);
  });

  it("shows an approved package to who may release it, and the live one to operators", async () => {
    expect(await titles("engineer2", "release")).toEqual([]);
    await approveSubmitted(people, built);
    for (const as of ["engineer", "engineer2", "reviewer"] as const)
      expect((await today(as)).release).toMatchObject([
        { title: `Package ${LOT} 1.0.0`, tone: "good", link: `/packages/${built.id}` },
      ]);
    expect(await titles("auditor", "release")).toEqual([]);
    expect(await titles("operator", "live")).toEqual([]);
    await releaseApproved(people, built);
    expect(await titles("engineer", "release")).toEqual([]);
    const { live } = await today("operator");
    expect(live).toMatchObject([{ title: `${LOT} 1.0.0`, detail: "MW-20 · 28 devices", link: "/stations/bench" }]);
    expect(live[0].digest).toMatch(/^[0-9a-f]{64}$/);
  });

  it("shows records that somebody should look at, as long as they are the serial's newest", async () => {
    station = await arrangeStation(api, "Line 1");
    const report = (n: number, change: object = {}) => reportOf(api, { package: built.id, serial: serial(n) }, change);
    await sendWrites(api, station, [
      await report(1),
      await report(2, { readbackSha256: "f".repeat(64) }),
      await report(3, { firmware: "9.9.9" }),
      await reportOf(api, { package: built.id, serial: "STRAY-1" }),
    ]);
    for (const as of ["engineer", "service", "auditor"] as const) {
      const { trouble } = await today(as);
      expect(new Map(trouble.map((item: Item) => [item.title, item.detail]))).toEqual(
        new Map([
          [serial(2), "read back differs · 1.0.0"],
          [serial(3), "verified · flagged firmware-differs · 1.0.0"],
          ["STRAY-1", "serial is in no lot · flagged not-live"],
        ]),
      );
    }
    await sendWrites(api, station, [await report(2)]);
    expect((await titles("service", "trouble")).sort()).toEqual([serial(3), "STRAY-1"]);
    expect(await titles("operator", "trouble")).toEqual([]);
  });

  it("shows what is held, and tells who held it that another has to let it go on", async () => {
    const body = { kind: "hold", reason: "odd zero", password: PASSWORD };
    await api.call("POST", `/devices/${serial(5)}/events`, { as: "service", body });
    expect((await today("engineer")).held).toMatchObject([
      { title: serial(5), detail: `${LOT} · odd zero`, who: "service", link: `/trace/${serial(5)}` },
    ]);
    expect((await today("service")).held[0].detail).toContain("a second person");
  });

  it("asks another reviewer for a reinstatement", async () => {
    const goOn = { kind: "resume", reason: "cable was loose", password: PASSWORD };
    await api.call("POST", `/devices/${serial(5)}/events`, { as: "engineer", body: goOn });
    expect(await titles("engineer", "held")).toEqual([]);
    await arrangeReleased(people, derived, { step: "patch" });
    const asked = await api.call("POST", `/lots/${LOT}/reinstatements`, {
      as: "reviewer",
      body: { package: built.id, reason: "1.0.1 drifts", password: PASSWORD },
    });
    expect(asked.status).toBe(201);
    expect(await titles("reviewer", "decide")).toEqual([]);
    expect((await today("reviewer2")).decide).toMatchObject([
      {
        kind: "reinstatement",
        title: `Package ${LOT} 1.0.0`,
        detail: "to be made live again · 1.0.1 drifts",
        who: "reviewer",
      },
    ]);
  });

  it("asks a second admin to confirm a role", async () => {
    const body = { roles: ["engineer", "reviewer"], password: PASSWORD };
    const changed = await api.call("PATCH", `/people/${api.people.engineer2.id}`, { as: "admin", body });
    expect(changed.status).toBe(200);
    expect((await today("admin2")).people).toMatchObject([
      { kind: "role", title: "engineer2 as reviewer", who: "admin", link: "/people" },
    ]);
    expect(await titles("admin", "people")).toEqual([]);
    expect(await titles("reviewer", "people")).toEqual([]);
  });

  it("is a person's", async () => {
    expect((await api.call("GET", "/today")).status).toBe(401);
    expect((await api.call("GET", "/today", { as: { bearer: station.key } })).status).toBe(403);
  });
});
