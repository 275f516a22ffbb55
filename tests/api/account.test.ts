import { beforeAll, describe, expect, it } from "vitest";
import { oneTimeOf } from "@/lib/services/people/one-time-code";
import { isPasswordRight } from "@/lib/services/people/password";
import { openTestApi, type TestApi } from "../support/api";
import { listMailTo } from "../support/mail";
import { PASSWORD, type PersonName } from "../support/people";

let api: TestApi;
beforeAll(async () => {
  api = await openTestApi();
});

const signed = { password: PASSWORD };
const makeKey = (as: PersonName, body: object = {}) =>
  api.call("POST", "/account/keys", { as, body: { name: "nightly export", ...signed, ...body } });
const revoke = (as: PersonName, id: string) => api.call("DELETE", `/account/keys/${id}`, { as });

describe("an access key", () => {
  it("is shown once, works at once, and never again after it was revoked", async () => {
    const made = await makeKey("engineer", { expiresInDays: 30 });
    expect(made.status).toBe(201);
    expect(made.body).toMatchObject({ name: "nightly export", lastUsedAt: null, revokedAt: null });
    expect(made.body.key).toMatch(/^twp_[\w-]{43}$/);
    expect(made.body.key.startsWith(made.body.prefix)).toBe(true);
    expect(Date.parse(made.body.expiresAt) - Date.parse(made.body.createdAt)).toBe(30 * 86_400_000);
    const bearer = made.body.key;
    expect((await api.call("GET", "/account", { as: { bearer } })).body).toMatchObject({
      name: "engineer",
      roles: ["engineer"],
    });
    const list = await api.call("GET", "/account/keys", { as: "engineer" });
    expect(list.body.items).toMatchObject([{ id: made.body.id, lastUsedAt: expect.any(String) }]);
    expect(JSON.stringify(list.body)).not.toContain(bearer);
    expect((await revoke("engineer", made.body.id)).status).toBe(204);
    expect((await api.call("GET", "/account", { as: { bearer } })).status).toBe(401);
    expect((await revoke("engineer", made.body.id)).body.code).toBe("key.not_found");
  });

  it("stands in the database as a hash only", async () => {
    const { body } = await makeKey("engineer");
    const row = await api.owner.selectFrom("accessKey").selectAll().where("id", "=", body.id).executeTakeFirstOrThrow();
    expect(JSON.stringify(row)).not.toContain(body.key);
    const { canonical } = await api.owner
      .selectFrom("ledgerEvent")
      .select("canonical")
      .orderBy("seq", "desc")
      .limit(1)
      .executeTakeFirstOrThrow();
    expect(JSON.parse(canonical)).toMatchObject({
      action: "access-key.made",
      data: { key: body.id, prefix: body.prefix },
    });
    expect(canonical).not.toContain(body.key);
  });

  it("works until it runs out", async () => {
    const { body } = await makeKey("engineer");
    await api.db
      .updateTable("accessKey")
      .set({ expiresAt: new Date(Date.now() - 1000) })
      .where("id", "=", body.id)
      .execute();
    expect((await api.call("GET", "/account", { as: { bearer: body.key } })).status).toBe(401);
  });

  it("makes no keys, changes no account and decides on nobody", async () => {
    const bearer = (await makeKey("admin2")).body.key;
    const as = { bearer };
    const refused = [
      await api.call("POST", "/account/keys", { as, body: { name: "another", ...signed } }),
      await api.call("PUT", "/account/password", { as, body: { ...signed, newPassword: "harbour lamp cedar" } }),
      await api.call("POST", "/account/one-time-code", { as, body: signed }),
      await api.call("DELETE", "/account/sessions", { as }),
      await api.call("PATCH", `/people/${api.people.service.id}`, { as, body: { ...signed, active: false } }),
      await api.call("GET", "/mail", { as }),
    ];
    expect(refused.map((reply) => [reply.status, reply.body.code])).toEqual(
      refused.map(() => [403, "auth.session_required"]),
    );
  });

  it("is one's own: nobody else sees or revokes it", async () => {
    const { body } = await makeKey("engineer");
    expect((await api.call("GET", "/account/keys", { as: "admin" })).body.items).toEqual([]);
    const foreign = await revoke("admin", body.id);
    expect([foreign.status, foreign.body.code]).toEqual([404, "key.not_found"]);
    expect((await api.call("GET", "/account", { as: { bearer: body.key } })).status).toBe(200);
  });

  it("is refused with a reason and then not made", async () => {
    expect((await makeKey("service", { password: "no" })).body.code).toBe("auth.password_wrong");
    for (const bad of [{ name: " " }, { expiresInDays: 0 }, { expiresInDays: 366 }, { expiresInDays: 1.5 }])
      expect((await makeKey("service", bad)).status).toBe(422);
    expect((await api.call("POST", "/account/keys", { body: { name: "x", ...signed } })).status).toBe(401);
    expect((await api.call("GET", "/account/keys", { as: "service" })).body.items).toEqual([]);
  });

  it("is one of at most twenty, even when they are made at once", async () => {
    const many = await Promise.all(Array.from({ length: 9 }, () => makeKey("auditor")));
    expect(many.every((reply) => reply.status === 201)).toBe(true);
    for (let n = 0; n < 10; n += 1) expect((await makeKey("auditor")).status).toBe(201);
    const last = await Promise.all([makeKey("auditor"), makeKey("auditor")]);
    expect(last.map((reply) => reply.status).sort()).toEqual([201, 409]);
    const pages = await api.call("GET", "/account/keys", { as: "auditor", query: { limit: 15 } });
    const rest = await api.call("GET", "/account/keys", {
      as: "auditor",
      query: { limit: 15, cursor: pages.body.next },
    });
    expect([pages.body.items.length, rest.body.items.length, rest.body.next]).toEqual([15, 5, null]);
  });
});

describe("one's own sessions", () => {
  it("are listed and ended one by one or all but this", async () => {
    await openSession("operator");
    const one = await openSession("operator");
    const list = () => api.call("GET", "/account/sessions", { as: "operator" });
    const { body } = await list();
    expect(body.items).toHaveLength(3);
    expect(body.items.filter((item: { current: boolean }) => item.current)).toMatchObject([
      { id: api.people.operator.sessionId },
    ]);
    const end = (id: string, as: PersonName = "operator") => api.call("DELETE", `/account/sessions/${id}`, { as });
    expect((await end(one, "service")).body.code).toBe("session.not_found");
    expect((await end(one)).status).toBe(204);
    expect((await end(one)).status).toBe(404);
    expect((await list()).body.items).toHaveLength(2);
    expect((await api.call("DELETE", "/account/sessions", { as: "operator" })).status).toBe(204);
    expect((await list()).body.items).toMatchObject([{ current: true }]);
    expect((await end(api.people.operator.sessionId)).status).toBe(204);
    expect((await list()).status).toBe(401);
  });
});

describe("one's own password", () => {
  const change = (as: PersonName, body: object) => api.call("PUT", "/account/password", { as, body });
  const isRight = async (as: PersonName, password: string) => {
    const { id } = api.people[as];
    const row = await api.db.selectFrom("person").select("passwordHash").where("id", "=", id).executeTakeFirstOrThrow();
    return isPasswordRight(row.passwordHash, password);
  };

  it("changes with the old one, ends other sessions and tells by mail", async () => {
    const other = await openSession("reviewer");
    const newPassword = "harbour lamp cedar";
    expect((await change("reviewer", { ...signed, newPassword })).status).toBe(204);
    expect(await isRight("reviewer", newPassword)).toBe(true);
    const { body } = await api.call("GET", "/account/sessions", { as: "reviewer" });
    expect(body.items.map((item: { id: string }) => item.id)).not.toContain(other);
    expect(await listMailTo(api.db, api.people.reviewer.email)).toMatchObject([{ template: "password-changed" }]);
    expect((await change("reviewer", { ...signed, newPassword: "another of some words" })).body.code).toBe(
      "auth.password_wrong",
    );
  });

  it.each([
    ["short", "eleven char"],
    ["the one before", PASSWORD],
    ["the address", "Reviewer2@marram.example"],
  ])("does not change to one that is %s", async (_why, newPassword) => {
    const { status, body } = await change("reviewer2", { ...signed, newPassword });
    expect([status, body.code, body.errors[0].path]).toEqual([422, "password.not_accepted", "/newPassword"]);
    expect(await isRight("reviewer2", PASSWORD)).toBe(true);
  });

  it("changes for nobody who is signed out, or comes from another site", async () => {
    const body = { ...signed, newPassword: "harbour lamp cedar" };
    expect((await api.call("PUT", "/account/password", { body })).status).toBe(401);
    const foreign = await api.call("PUT", "/account/password", {
      as: "reviewer2",
      body,
      headers: { origin: "http://elsewhere.example" },
    });
    expect(foreign.body.code).toBe("auth.origin_mismatch");
    expect(await isRight("reviewer2", PASSWORD)).toBe(true);
  });
});

describe("one-time codes", () => {
  const begin = (as: PersonName, password = PASSWORD) =>
    api.call("POST", "/account/one-time-code", { as, body: { password } });
  const confirm = (as: PersonName, code: string) =>
    api.call("POST", "/account/one-time-code/confirm", { as, body: { code } });
  const remove = (as: PersonName, body: object) => api.call("POST", "/account/one-time-code/remove", { as, body });
  const codeOf = (secret: string, secondsOn = 0) =>
    oneTimeOf(secret, "").generate({ timestamp: Date.now() + secondsOn * 1000 });

  it("are asked for once a code was seen, each once, until they are removed with one", async () => {
    expect((await confirm("engineer2", "123456")).body.code).toBe("one-time-code.wrong_state");
    const { status, body } = await begin("engineer2");
    expect(status).toBe(201);
    expect(body.uri).toBe(
      `otpauth://totp/Trimwright:engineer2%40marram.example?issuer=Trimwright&secret=${body.secret}&algorithm=SHA1&digits=6&period=30`,
    );
    expect(body.qrSvg).toMatch(/^<svg [^>]*viewBox="0 0 \d+ \d+"/);
    expect((await makeKey("engineer2")).status).toBe(201);
    expect((await confirm("engineer2", wrongFor(body.secret))).body.code).toBe("auth.code_wrong");
    const code = codeOf(body.secret, -30);
    expect((await confirm("engineer2", code)).status).toBe(204);
    expect((await api.call("GET", "/account", { as: "engineer2" })).body.oneTimeCode).toBe(true);
    expect((await begin("engineer2")).body.code).toBe("auth.code_wrong");
    expect((await makeKey("engineer2")).body.code).toBe("auth.code_wrong");
    expect((await makeKey("engineer2", { oneTimeCode: code })).body.code).toBe("auth.code_wrong");
    expect((await makeKey("engineer2", { oneTimeCode: codeOf(body.secret) })).status).toBe(201);
    expect((await confirm("engineer2", codeOf(body.secret, 30))).body.code).toBe("one-time-code.exists");
    expect((await remove("engineer2", signed)).body.code).toBe("auth.code_wrong");
    expect((await remove("engineer2", { ...signed, oneTimeCode: codeOf(body.secret, 30) })).status).toBe(204);
    expect((await makeKey("engineer2")).status).toBe(201);
    expect((await remove("engineer2", signed)).body.code).toBe("one-time-code.wrong_state");
  });

  it("begin anew with another secret, and only with the password", async () => {
    const [one, two] = [await begin("service"), await begin("service")];
    expect(one.body.secret).not.toBe(two.body.secret);
    expect((await confirm("service", codeOf(one.body.secret))).body.code).toBe("auth.code_wrong");
    expect((await begin("service", "no")).body.code).toBe("auth.password_wrong");
    expect((await confirm("service", "12345")).status).toBe(422);
    expect((await api.call("POST", "/account/one-time-code", { body: signed })).status).toBe(401);
  });

  it("are guessed ten times and no more", async () => {
    const { body } = await begin("admin");
    const guesses = await Promise.all(Array.from({ length: 12 }, () => confirm("admin", wrongFor(body.secret))));
    const codes = guesses.map((reply) => reply.body.code).sort();
    expect(codes.filter((code) => code === "auth.code_wrong")).toHaveLength(10);
    expect(codes.filter((code) => code === "auth.too_many_attempts")).toHaveLength(2);
  });

  function wrongFor(secret: string): string {
    const right = [-30, 0, 30].map((seconds) => codeOf(secret, seconds));
    return ["000000", "111111", "222222", "333333"].find((code) => !right.includes(code)) as string;
  }
});

/** Another browser of a person. @returns the session's id */
async function openSession(name: PersonName): Promise<string> {
  const id = api.ctx(name).newId();
  const at = new Date();
  const expiresAt = new Date(at.getTime() + 3_600_000);
  await api.db
    .insertInto("session")
    .values({
      id,
      personId: api.people[name].id,
      createdAt: at,
      expiresAt,
      lastSeenAt: at,
      userAgent: "another browser",
    })
    .execute();
  return id;
}
