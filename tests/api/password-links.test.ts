import { beforeAll, describe, expect, it } from "vitest";
import { inviteFirstAdmin } from "@/lib/services/people/invite-first-admin";
import { isPasswordRight } from "@/lib/services/people/password";
import { describeLink } from "@/lib/services/people/use-link";
import { openTestApi, type TestApi } from "../support/api";
import { systemContext } from "../support/jobs";
import { listMailTo, tokenOf } from "../support/mail";
import { PASSWORD, type PersonName } from "../support/people";

let api: TestApi;
beforeAll(async () => {
  api = await openTestApi();
});

const NEW = "harbour lamp cedar";
const ask = (email: string) => api.call("POST", "/account/links", { body: { email } });
const use = (token: string, more: object = {}) =>
  api.call("POST", "/account/links/use", { body: { token, newPassword: NEW, ...more } });
const passwordHash = async (id: string) =>
  (await api.db.selectFrom("person").select("passwordHash").where("id", "=", id).executeTakeFirstOrThrow())
    .passwordHash;
const lastToken = async (email: string) => tokenOf((await listMailTo(api.db, email)).at(-1));

describe("a forgotten password", () => {
  it("is chosen anew with a mailed link, which ends sessions and works once", async () => {
    const { id, email } = api.people.engineer;
    expect((await ask(` ${email.toUpperCase()}`)).status).toBe(204);
    const token = await lastToken(email);
    expect(await describeLink(systemContext(api.db), token)).toEqual({
      state: "open",
      name: "engineer",
      email,
      firstAdmin: false,
    });
    const { status, body } = await use(token);
    expect([status, body]).toEqual([200, { email }]);
    expect(await isPasswordRight(await passwordHash(id), NEW)).toBe(true);
    expect((await api.call("GET", "/account", { as: "engineer" })).status).toBe(401);
    const twice = await use(token, { newPassword: "another one altogether" });
    expect([twice.status, twice.body.code]).toEqual([410, "link.used"]);
    expect(await isPasswordRight(await passwordHash(id), NEW)).toBe(true);
    expect((await listMailTo(api.db, email)).at(-1)).toMatchObject({ template: "password-changed" });
  });

  it("answers the same for an address nobody has, and mails nothing", async () => {
    const { n } = await api.db
      .selectFrom("mail")
      .select((eb) => eb.fn.countAll<string>().as("n"))
      .executeTakeFirstOrThrow();
    const unknown = await ask("nobody@marram.example");
    const known = await ask(api.people.auditor.email);
    expect([unknown.status, unknown.body]).toEqual([known.status, known.body]);
    const after = await api.db
      .selectFrom("mail")
      .select((eb) => eb.fn.countAll<string>().as("n"))
      .executeTakeFirstOrThrow();
    expect(Number(after.n) - Number(n)).toBe(1);
  });

  it("mails three links an hour and drops the rest without a word, however they come", async () => {
    const { email } = api.people.service;
    const replies = await Promise.all(Array.from({ length: 6 }, () => ask(email)));
    expect(replies.map((reply) => reply.status)).toEqual(Array(6).fill(204));
    const mails = await listMailTo(api.db, email);
    expect(mails).toHaveLength(3);
    const states = await Promise.all(mails.map((mail) => describeLink(systemContext(api.db), tokenOf(mail))));
    expect(states.map((link) => link.state).sort()).toEqual(["open", "used", "used"]);
  });

  it("is no way back in for somebody who was deactivated", async () => {
    await ask(api.people.operator.email);
    const token = await lastToken(api.people.operator.email);
    const body = { active: false, password: PASSWORD };
    await api.call("PATCH", `/people/${api.people.operator.id}`, { as: "admin", body });
    expect((await use(token)).body.code).toBe("link.used");
    await ask(api.people.operator.email);
    expect(await listMailTo(api.db, api.people.operator.email)).toHaveLength(1);
  });

  it("is used by one of two at once", async () => {
    await ask(api.people.reviewer2.email);
    const token = await lastToken(api.people.reviewer2.email);
    const replies = await Promise.all([
      use(token, { newPassword: "first of the two" }),
      use(token, { newPassword: "second of the two" }),
    ]);
    expect(replies.map((reply) => reply.status).sort()).toEqual([200, 410]);
    const won = replies[0]?.status === 200 ? "first of the two" : "second of the two";
    expect(await isPasswordRight(await passwordHash(api.people.reviewer2.id), won)).toBe(true);
  });

  it.each([
    ["too short", "eleven char"],
    ["the address", "engineer2@marram.example"],
    ["among the first guesses", "Password 1234"],
    ["one sign over and over", "aaaaaaaaaaaaaa"],
  ])("is refused when it is %s, and the link stays open", async (_why, newPassword) => {
    const { email } = api.people.engineer2;
    const token = await linkOf("engineer2");
    const { status, body } = await use(token, { newPassword });
    expect([status, body.code, body.errors[0].path]).toEqual([422, "password.not_accepted", "/newPassword"]);
    expect(await describeLink(systemContext(api.db), token)).toMatchObject({ state: "open", email });
  });

  it("answers for a link that is not there, ran out, or is given names it does not ask for", async () => {
    expect((await use("x".repeat(43))).body.code).toBe("link.not_found");
    expect((await use("short")).status).toBe(422);
    const token = await linkOf("engineer2");
    await api.db
      .updateTable("passwordLink")
      .set({ expiresAt: new Date(0) })
      .where("usedAt", "is", null)
      .execute();
    const late = await use(token);
    expect([late.status, late.body.code]).toEqual([410, "link.expired"]);
  });

  /** Sends a link by an admin, who is not held to three an hour. */
  async function linkOf(name: PersonName): Promise<string> {
    await api.call("POST", `/people/${api.people[name].id}/link`, { as: "admin", body: { password: PASSWORD } });
    return lastToken(api.people[name].email);
  }
});

describe("a link sent by an admin", () => {
  const send = (id: string, as: PersonName = "admin", password = PASSWORD) =>
    api.call("POST", `/people/${id}/link`, { as, body: { password } });

  it("takes a lost one-time code away; one asked for does not", async () => {
    const { id, email } = api.people.reviewer;
    const enrolled = { oneTimeSecret: "JBSWY3DPEHPK3PXP", oneTimeEnrolledAt: new Date() };
    await api.db.updateTable("person").set(enrolled).where("id", "=", id).execute();
    await ask(email);
    await use(await lastToken(email));
    expect(await oneTime(id)).not.toBeNull();
    expect((await send(id)).status).toBe(204);
    expect(await oneTime(id)).not.toBeNull();
    const mails = await listMailTo(api.db, email);
    expect(mails.at(-1)).toMatchObject({ template: "new-link" });
    expect((await use(tokenOf(mails.at(-1)), { newPassword: "yet another one" })).status).toBe(200);
    expect(await oneTime(id)).toBeNull();
  });

  it("is for others, who are active", async () => {
    expect((await send(api.people.admin.id)).body.code).toBe("person.own_account");
    expect((await send(api.people.operator.id)).body.code).toBe("person.wrong_state");
    expect((await send(api.people.auditor.id, "admin2", "no")).body.code).toBe("auth.password_wrong");
    expect((await send(api.people.auditor.id, "auditor")).status).toBe(403);
    expect((await send("018f0000-0000-7000-8000-000000000000")).status).toBe(404);
    expect(
      (await api.call("POST", `/people/${api.people.auditor.id}/link`, { body: { password: PASSWORD } })).status,
    ).toBe(401);
  });

  const oneTime = async (id: string) =>
    (await api.db.selectFrom("person").select("oneTimeEnrolledAt").where("id", "=", id).executeTakeFirstOrThrow())
      .oneTimeEnrolledAt;
});

describe("the first admin", () => {
  it("is invited by nobody once there is one", async () => {
    expect(await inviteFirstAdmin(systemContext(api.db))).toBeUndefined();
  });
});
