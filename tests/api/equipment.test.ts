import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { uploadRun } from "@/lib/services/runs/upload-run";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD } from "../support/people";
import { arrangeFamilyLot } from "../support/scenario/family-lot";

let api: TestApi;
beforeAll(async () => {
  api = await openTestApi();
});
afterAll(() => api.close());

const sensor = {
  code: "PT-01",
  kind: "sensor",
  certificate: "K-2026-118",
  calibratedUntil: "2027-03-31",
  uncertainty: 0.03,
};
const add = (body: object, as: "engineer" | "auditor" = "engineer") => api.call("POST", "/equipment", { as, body });
const change = (code: string, body: object) => api.call("PATCH", `/equipment/${code}`, { as: "engineer", body });

describe("equipment", () => {
  it("is added, listed by code and changed", async () => {
    const { status, body } = await add({ ...sensor, code: "pt-01" });
    expect(status).toBe(201);
    expect(body).toMatchObject(sensor);
    await add({ ...sensor, code: "CH-01", kind: "chamber" });
    const list = await api.call("GET", "/equipment", { as: "auditor", query: { limit: 1 } });
    expect(list.body.items.map((one: { code: string }) => one.code)).toEqual(["CH-01"]);
    const rest = await api.call("GET", "/equipment", { as: "auditor", query: { cursor: list.body.next } });
    expect(rest.body.items).toMatchObject([sensor]);
    const changed = await change("pt-01", { certificate: "K-2027-004", calibratedUntil: "2028-03-31" });
    expect(changed.body).toMatchObject({ ...sensor, certificate: "K-2027-004", calibratedUntil: "2028-03-31" });
  });

  it("takes the factor 2 where none is named, and a chamber's places with their deviations", async () => {
    const places = [{ position: "A1", deviationK: 0.12, uncertaintyK: 0.1 }];
    const { body } = await add({ ...sensor, code: "CH-02", kind: "chamber", positions: places });
    expect(body).toMatchObject({ coverageFactor: 2, positions: places });
    const changed = await change("CH-02", { coverageFactor: 2.05, positions: [] });
    expect(changed.body).toMatchObject({ coverageFactor: 2.05, positions: [], certificate: sensor.certificate });
    const refused = await change("PT-01", { positions: places });
    expect([refused.status, refused.body.code]).toEqual([422, "equipment.not_a_chamber"]);
    const list = await api.call("GET", "/equipment", { as: "auditor" });
    const factors = list.body.items.map((one: { coverageFactor: number }) => one.coverageFactor);
    expect(factors).toEqual([2, 2.05, 2]);
  });

  it("is told by its code or id, with the runs that used it, newest first", async () => {
    const one = await api.call("GET", "/equipment/pt-01", { as: "service" });
    expect(one.body).toMatchObject({ code: "PT-01", coverageFactor: 2 });
    expect((await api.call("GET", `/equipment/${one.body.id}`, { as: "auditor" })).body).toEqual(one.body);
    const people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
    const { lot, read } = await arrangeFamilyLot(people);
    const runs: string[] = [];
    for (const purpose of ["zero", "span"] as const) {
      const bytes = read(`readings-${purpose}.csv`);
      const run = await uploadRun(people.engineer, { lot, purpose, equipment: ["PT-01"], addDevices: false, bytes });
      runs.push(run.id);
    }
    await change("PT-01", { uncertainty: 0.05 });
    const used = await api.call("GET", "/equipment/PT-01/runs", { as: "auditor", query: { limit: 1 } });
    expect(used.body.items).toMatchObject([{ run: runs[1], lot, purpose: "span", uncertainty: 0.03, counted: true }]);
    const rest = await api.call("GET", "/equipment/PT-01/runs", { as: "auditor", query: { cursor: used.body.next } });
    expect([rest.body.items[0].run, rest.body.next]).toEqual([runs[0], null]);
    expect((await api.call("GET", "/equipment/NONE", { as: "auditor" })).body.code).toBe("equipment.not_found");
    expect((await api.call("GET", "/equipment/NONE/runs", { as: "auditor" })).status).toBe(404);
  });

  it("stands in the ledger with old and new values", async () => {
    const { canonical } = await api.owner
      .selectFrom("ledgerEvent")
      .select("canonical")
      .where("action", "=", "equipment.changed")
      .executeTakeFirstOrThrow();
    expect(JSON.parse(canonical)).toMatchObject({
      subject: "PT-01",
      data: { from: { certificate: "K-2026-118" }, to: { certificate: "K-2027-004" } },
    });
  });

  it.each([
    ["/kind", { kind: "scale" }],
    ["/calibratedUntil", { calibratedUntil: "2027-02-30" }],
    ["/uncertainty", { uncertainty: -1 }],
    ["/certificate", { certificate: " " }],
    ["/code", { code: "a b" }],
    ["/coverageFactor", { coverageFactor: 0 }],
    ["/positions", { positions: [{ position: "A1", deviationK: 0, uncertaintyK: 0.1 }] }],
    ["/positions/0/position", { kind: "chamber", positions: [{ position: "=A1", deviationK: 0, uncertaintyK: 0.1 }] }],
    [
      "/positions/1/position",
      { kind: "chamber", positions: [0, 1].map((deviationK) => ({ position: "A1", deviationK, uncertaintyK: 0.1 })) },
    ],
  ])("is refused with a bad %s", async (path, values) => {
    const { status, body } = await add({ ...sensor, code: "BAD", ...values });
    expect([status, body.errors[0].path]).toEqual([422, path]);
  });

  it("answers 409 for a code that is taken, 404 for one that is not there, 422 for no change", async () => {
    expect((await add(sensor)).body.code).toBe("equipment.exists");
    const missing = await change("NONE", { uncertainty: 1 });
    expect([missing.status, missing.body.code]).toEqual([404, "equipment.not_found"]);
    expect((await change("PT-01", {})).status).toBe(422);
    expect((await change("PT-01", { kind: "load" })).status).toBe(422);
  });

  it("is kept by engineers, read by readers", async () => {
    expect((await add({ ...sensor, code: "NO" }, "auditor")).body.code).toBe("auth.forbidden");
    expect((await api.call("PATCH", "/equipment/PT-01", { as: "reviewer", body: { uncertainty: 1 } })).status).toBe(
      403,
    );
    expect((await api.call("GET", "/equipment", { as: "operator" })).status).toBe(403);
    expect((await api.call("GET", "/equipment")).status).toBe(401);
  });
});
