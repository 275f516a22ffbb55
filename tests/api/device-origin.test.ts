/** The way back from a device's bytes to its readings, and forward from one thing to all devices. */
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { getWriteProgress } from "@/lib/services/stations/get-write-progress";
import { listToday } from "@/lib/services/today/list-today";
import { getDeviceOrigin } from "@/lib/services/trace/get-device-origin";
import { countImpact, listImpactChoices } from "@/lib/services/trace/survey-impact";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD } from "../support/people";
import { arrangeDerived, type DerivedLot } from "../support/scenario/derived";
import type { ScenarioPeople } from "../support/scenario/family-lot";
import { arrangeReleased, arrangeSubmitted } from "../support/scenario/packaged";
import { arrangeStation, reportOf, sendWrites, type TestStation } from "../support/scenario/station";

let api: TestApi;
let people: ScenarioPeople;
let derived: DerivedLot;
let station: TestStation;
let live: string;
let inReview: string;

const LOT = "MW20-2609";
const serial = (n: number) => `${LOT}-${String(n).padStart(5, "0")}`;

beforeAll(async () => {
  api = await openTestApi();
  people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  derived = await arrangeDerived(people);
  live = (await arrangeReleased(people, derived)).id;
  inReview = (await arrangeSubmitted(people, derived)).id;
  station = await arrangeStation(api, "Line 1");
  const writes = await Promise.all([1, 2, 3].map((n) => reportOf(api, { package: live, serial: serial(n) })));
  const failed = await reportOf(api, { package: live, serial: serial(4) }, { result: "failed", readbackSha256: null });
  await sendWrites(api, station, [...writes, failed]);
}, 60_000);
afterAll(() => api.close());

const originOf = (n: number, carried: string | null, who: "service" | "operator" = "service") =>
  getDeviceOrigin(api.ctx(who), { serial: serial(n), carried });

describe("where an image comes from", () => {
  it("is told back to the device's own readings, with who signed each step", async () => {
    const origin = await originOf(11, live);
    expect(origin).toMatchObject({
      basis: "carried",
      package: { id: live, version: "1.0.0", state: "live", builder: "engineer" },
      layout: { version: "1.0.0" },
      revision: { number: 1 },
      derivation: { id: derived.derivation, method: "pooled-gain", role: "zero", state: "approved" },
    });
    const own = new Map(origin?.runs.map((run) => [run.purpose, run.own]));
    expect(own.get("sample")).toBeNull();
    expect(own.get("zero")).toMatchObject({ loaded: false });
    expect(own.get("span")).toMatchObject({ loaded: true });
    expect(new Set(origin?.signatures.map((one) => one.what))).toEqual(
      new Set(["Family revision 1", "Layout 1.0.0", "Coefficients", "Package 1.0.0"]),
    );
    expect(origin?.signatures.every((one) => one.name === "reviewer")).toBe(true);
  });

  it("gives the fields decoded, each with the source that the layout names", async () => {
    const fields = (await originOf(11, live))?.image.fields ?? [];
    expect(fields.find((field) => field.source === "device.serial")?.value).toBe(serial(11));
    expect(fields.find((field) => field.source === "coefficients.gainTc")?.value).toBeLessThan(0);
    expect(fields.at(-1)).toMatchObject({ name: "imageCrc", source: null });
  });

  it("is that of the live release where nothing known was written", async () => {
    expect(await originOf(20, null)).toMatchObject({ basis: "live", package: { id: live } });
  });

  it("shows operators released images only", async () => {
    expect(await originOf(11, live, "operator")).not.toBeNull();
    expect(await originOf(11, inReview, "operator")).toBeNull();
    expect(await originOf(11, inReview)).toMatchObject({ package: { state: "in-review" } });
  });
});

it("tells approvals in a device's history, by who signed", async () => {
  const { history } = (await api.call("GET", `/devices/${serial(1)}`, { as: "service" })).body;
  const approved = history.filter((entry: { kind: string }) => entry.kind === "approved");
  expect(approved.map((entry: { what: string; who: string }) => [entry.what, entry.who])).toEqual([
    ["Package 1.0.0 approved", "reviewer"],
    ["Coefficients approved", "reviewer"],
  ]);
});

describe("what one thing reached", () => {
  it("is counted with where the devices stand now", async () => {
    expect(await countImpact(api.ctx("auditor"), { run: derived.runs.sample })).toEqual({
      devices: 28,
      lots: 1,
      carrying: 3,
      carryingShipped: 0,
      unknown: 0,
      held: 0,
      more: false,
    });
  });

  it("is offered by kind, newest first, and to readers only", async () => {
    const packages = await listImpactChoices(api.ctx("service"), "package");
    expect(packages.map((one) => one.value)).toEqual([inReview, live]);
    expect(await listImpactChoices(api.ctx("service"), "run")).toHaveLength(4);
    await expect(listImpactChoices(api.ctx("operator"), "run")).rejects.toMatchObject({ code: "auth.forbidden" });
    await expect(countImpact(api.ctx("operator"), { package: live })).rejects.toMatchObject({ code: "auth.forbidden" });
  });
});

it("draws how writing goes as a curve from nothing to all that were verified", async () => {
  const progress = await getWriteProgress(api.ctx("engineer"), LOT);
  expect(progress.live).toEqual({ package: live, version: "1.0.0", devices: 28, verified: 3 });
  expect(progress.counts).toEqual({ records: 4, otherwise: 1, flagged: 0, stations: 1 });
  expect(progress.livePackage.map((point) => point.devices)).toEqual([0, 1, 2, 3]);
  expect(progress.anyPackage).toEqual(progress.livePackage);
  await expect(getWriteProgress(api.ctx("engineer"), "NONE")).rejects.toMatchObject({ code: "lot.not_found" });
});

it("tells who made something that it waits for somebody else, and nobody else", async () => {
  const { awaited } = await listToday(api.ctx("engineer"));
  expect(awaited.map((item) => item.link)).toContain(`/packages/${inReview}`);
  expect((await listToday(api.ctx("engineer2"))).awaited).toEqual([]);
  expect((await listToday(api.ctx("service"))).awaited).toEqual([]);
});
