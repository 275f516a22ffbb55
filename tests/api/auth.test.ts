import { beforeAll, describe, expect, it } from "vitest";
import { confirmIdentity } from "@/lib/services/people/confirm-identity";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD } from "../support/people";

let api: TestApi;
beforeAll(async () => {
  api = await openTestApi();
});

describe("a session", () => {
  it("reads, and is nobody once it ended", async () => {
    expect((await api.call("GET", "/families", { as: "engineer" })).status).toBe(200);
    await api.db
      .updateTable("session")
      .set({ endedAt: new Date() })
      .where("id", "=", api.people.engineer2.sessionId)
      .execute();
    expect((await api.call("GET", "/families", { as: "engineer2" })).status).toBe(401);
  });
});

describe("confirming who one is", () => {
  it("takes the right password and notes nothing", async () => {
    await confirmIdentity(api.ctx("reviewer"), { password: PASSWORD });
    expect(await api.db.selectFrom("accessLog").select("id").execute()).toEqual([]);
  });
  it("refuses the eleventh wrong password, and the right one with it", async () => {
    const wrong = () => confirmIdentity(api.ctx("auditor"), { password: "not it" });
    for (let n = 0; n < 10; n += 1) await expect(wrong()).rejects.toMatchObject({ code: "auth.password_wrong" });
    await expect(wrong()).rejects.toMatchObject({ code: "auth.too_many_attempts" });
    await expect(confirmIdentity(api.ctx("auditor"), { password: PASSWORD })).rejects.toMatchObject({
      code: "auth.too_many_attempts",
    });
  });
});
