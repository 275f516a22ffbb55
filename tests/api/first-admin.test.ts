import { beforeAll, describe, expect, it } from "vitest";
import { sessionCookieName, sessionToken } from "@/lib/auth/session-token";
import { env } from "@/lib/env";
import { FIRST_ADMIN_EMAIL, inviteFirstAdmin } from "@/lib/services/people/invite-first-admin";
import { describeLink } from "@/lib/services/people/use-link";
import { openTestApi, type TestApi } from "../support/api";
import { systemContext } from "../support/jobs";
import { listMailTo, tokenOf } from "../support/mail";

let api: TestApi;
beforeAll(async () => {
  api = await openTestApi();
  // As after a first start: nobody has the role admin.
  await api.owner.updateTable("roleGrant").set({ endedAt: new Date() }).execute();
  await api.owner.updateTable("person").set({ passwordHash: null }).execute();
});

const PASSWORD = "harbour lamp cedar";
const names = { name: "Ada Quist", email: "ada@marram.example" };
const use = (token: string, more: object = names) =>
  api.call("POST", "/account/links/use", { body: { token, newPassword: PASSWORD, ...more } });
const invite = async () => tokenOf({ body: (await inviteFirstAdmin(systemContext(api.db)))?.url ?? "" });
const post = (path: string, cookie: string, body: object) =>
  api.call("POST", path, { body: { password: PASSWORD, ...body }, headers: { cookie, origin: env().origin } });

/** A browser of somebody who signed in. */
async function browserOf(email: string): Promise<string> {
  const { id: personId } = await api.db
    .selectFrom("person")
    .select("id")
    .where("email", "=", email)
    .executeTakeFirstOrThrow();
  const ctx = systemContext(api.db);
  const id = ctx.newId();
  const at = new Date();
  const expiresAt = new Date(at.getTime() + 3_600_000);
  await api.db.insertInto("session").values({ id, personId, createdAt: at, expiresAt, lastSeenAt: at }).execute();
  return `${sessionCookieName()}=${await sessionToken(id)}`;
}

describe("the first admin", () => {
  it("comes in by the link of any start, gives a name, and makes the other links useless", async () => {
    const tokens = [...(await Promise.all([invite(), invite()])), await invite()] as const;
    expect(await describeLink(systemContext(api.db), tokens[0])).toEqual({
      state: "open",
      name: "",
      email: "",
      firstAdmin: true,
    });
    const { body } = await use(tokens[1], {});
    expect([body.code, body.errors[0].path]).toEqual(["request.invalid", "/name"]);
    expect((await use(tokens[1], { ...names, email: api.people.auditor.email })).body.code).toBe("person.exists");
    const replies = await Promise.all([use(tokens[0]), use(tokens[1]), use(tokens[2])]);
    expect(replies.map((reply) => reply.status).sort()).toEqual([200, 410, 410]);
    expect(await inviteFirstAdmin(systemContext(api.db))).toBeUndefined();
    const people = await api.db
      .selectFrom("person")
      .select(["name", "email"])
      .where("email", "in", [names.email, FIRST_ADMIN_EMAIL])
      .execute();
    expect(people).toEqual([names]);
  });

  it("grants alone until a second admin has chosen a password, and then no more", async () => {
    const ada = await browserOf(names.email);
    const second = { name: "Ben Ruud", email: "ben@marram.example", roles: ["admin", "reviewer"] };
    const { body: ben } = await post("/people", ada, second);
    expect(ben).toMatchObject({ roles: ["admin", "reviewer"], pending: [] });
    const third = { name: "Cleo Marsh", email: "cleo@marram.example", roles: ["reviewer"] };
    expect((await post("/people", ada, third)).body).toMatchObject({ roles: ["reviewer"], pending: [] });
    await use(tokenOf((await listMailTo(api.db, second.email))[0]), {});
    const { body: late } = await post("/people", ada, {
      name: "Dan Holt",
      email: "dan@marram.example",
      roles: ["reviewer"],
    });
    expect(late).toMatchObject({ roles: [], pending: [{ role: "reviewer", askedBy: "Ada Quist" }] });
    const confirmed = await post(`/people/${late.id}/roles/reviewer/confirm`, await browserOf(second.email), {});
    expect(confirmed.body.roles).toEqual(["reviewer"]);
  });

  it("is warned of roles that too few can act in", async () => {
    const cookie = await browserOf(names.email);
    const { body } = await api.call("GET", "/people", { headers: { cookie } });
    const warnings = body.warnings.map(({ role, count }: { role: string; count: number }) => [role, count]);
    expect(warnings).toEqual([
      ["engineer", 0],
      ["reviewer", 1],
    ]);
  });
});
