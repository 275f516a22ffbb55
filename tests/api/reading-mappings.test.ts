import { beforeAll, describe, expect, it } from "vitest";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD } from "../support/people";
import { arrangeFamilyLot } from "../support/scenario/family-lot";

let api: TestApi;
beforeAll(async () => {
  api = await openTestApi();
  await arrangeFamilyLot({ engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD });
});

const PATH = "/families/mw-20/reading-mapping";
const mapping = {
  columns: { serial: "Prüfling", chamber_c: "Kammer °C", taken_at: "#8" },
  headerRow: true,
  decimalComma: true,
  offset: "+01:00",
  encoding: "windows-1252",
  delimiter: ";",
  sheet: null,
};
const set = (body: object, as: "engineer" | "engineer2" | "reviewer" = "engineer", path = PATH) =>
  api.call("PUT", path, { as, body });
const countEvents = async () =>
  (await api.db.selectFrom("ledgerEvent").select("seq").where("action", "=", "reading-mapping.changed").execute())
    .length;

describe("the mapping of a family's tables", () => {
  it("is nothing at first, then what was accepted last, by whom", async () => {
    const none = await api.call("GET", PATH, { as: "auditor" });
    expect([none.status, none.body]).toEqual([200, { mapping: null, updatedAt: null, updatedBy: null }]);
    expect((await set(mapping)).body).toMatchObject({ mapping, updatedBy: "engineer" });
    expect((await set({ ...mapping, offset: "" }, "engineer2")).status).toBe(200);
    const kept = await api.call("GET", PATH, { as: "service" });
    expect(kept.body).toMatchObject({ mapping: { ...mapping, offset: "" }, updatedBy: "engineer2" });
  });

  it("is written into the ledger where it changes, and only there", async () => {
    const before = await countEvents();
    await set({ ...mapping, offset: "Z" });
    await set({ ...mapping, offset: "Z" });
    expect(await countEvents()).toBe(before + 1);
  });

  it("takes one of two at the same moment after the other", async () => {
    const replies = await Promise.all([set({ ...mapping, sheet: "A" }), set({ ...mapping, sheet: "B" }, "engineer2")]);
    expect(replies.map((reply) => reply.status)).toEqual([200, 200]);
    const kept = await api.call("GET", PATH, { as: "auditor" });
    expect(["A", "B"]).toContain(kept.body.mapping.sheet);
  });

  it.each([
    ["/columns", { columns: { colour: "x" } }],
    ["/columns/serial", { columns: { serial: "a\u0000b" } }],
    ["/columns/serial", { columns: { serial: "\ud800" } }],
    ["/offset", { offset: "+1" }],
    ["/encoding", { encoding: "utf-7" }],
    ["/delimiter", { delimiter: "|" }],
  ])("is refused with a bad %s", async (path, values) => {
    const before = await countEvents();
    const { status, body } = await set({ ...mapping, ...values });
    expect([status, body.errors?.[0]?.path]).toEqual([422, path]);
    expect(await countEvents()).toBe(before);
  });

  it("is kept by engineers, of families that are there", async () => {
    expect((await set(mapping, "reviewer")).body.code).toBe("auth.forbidden");
    expect((await api.call("GET", PATH)).status).toBe(401);
    expect((await set(mapping, "engineer", "/families/NONE/reading-mapping")).status).toBe(404);
    expect((await api.call("GET", "/families/NONE/reading-mapping", { as: "auditor" })).status).toBe(404);
  });
});
