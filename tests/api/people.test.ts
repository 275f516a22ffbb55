import { beforeAll, describe, expect, it } from "vitest";
import { changePerson } from "@/lib/services/people/change-person";
import { confirmIdentity } from "@/lib/services/people/confirm-identity";
import { insertAccessKey } from "../support/access-key";
import { openTestApi, type TestApi } from "../support/api";
import { listMailTo, tokenOf } from "../support/mail";
import { PASSWORD, type PersonName } from "../support/people";

let api: TestApi;
beforeAll(async () => {
  api = await openTestApi();
});

const signed = { password: PASSWORD };
let count = 0;
const newcomer = (roles: string[] = []) => {
  count += 1;
  return { name: `Newcomer ${count}`, email: `newcomer${count}@marram.example`, roles, ...signed };
};
const post = (path: string, as: PersonName, body: object = signed) => api.call("POST", path, { as, body });
const add = (body: object, as: PersonName = "admin") => post("/people", as, body);
const change = (id: string, body: object, as: PersonName = "admin") =>
  api.call("PATCH", `/people/${id}`, { as, body: { ...signed, ...body } });
const added = async (roles: string[] = [], as: PersonName = "admin") => (await add(newcomer(roles), as)).body;
const actions = async (subject: string) => {
  const rows = await api.owner
    .selectFrom("ledgerEvent")
    .select("action")
    .where("subject", "=", subject)
    .orderBy("seq")
    .execute();
  return rows.map((row) => row.action);
};

/** Somebody new who has chosen a password and sits in a browser. */
async function arrived(roles: string[] = []) {
  const person = await added(roles);
  const token = tokenOf((await listMailTo(api.db, person.email))[0]);
  await api.call("POST", "/account/links/use", { body: { token, newPassword: "four words or some more" } });
  return person;
}

describe("adding a person", () => {
  it("mails a link, grants what one admin may grant and lets the rest wait", async () => {
    const body = newcomer(["engineer", "reviewer"]);
    const { status, body: person } = await add({ ...body, email: ` ${body.email.toUpperCase()} ` });
    expect(status).toBe(201);
    expect(person).toMatchObject({
      name: body.name,
      email: body.email,
      active: true,
      roles: ["engineer"],
      pending: [{ role: "reviewer", askedBy: "admin", askedById: api.people.admin.id }],
      signIn: { passwordChosen: false, oneTimeCode: false, lastSeenAt: null },
    });
    const [welcome] = await listMailTo(api.db, body.email);
    expect(welcome).toMatchObject({ template: "welcome", personId: person.id });
    expect(tokenOf(welcome)).toMatch(/^[\w-]{43}$/);
    const told = await listMailTo(api.db, "admin2@marram.example");
    expect(told.at(-1)).toMatchObject({
      template: "role-to-confirm",
      subject: `Confirm the role reviewer of ${body.name}`,
    });
    expect(await listMailTo(api.db, "admin@marram.example")).toEqual([]);
    expect(await actions(person.id)).toEqual(["person.added"]);
  });

  it("keeps name and address out of the ledger's chain", async () => {
    const person = await added();
    const { canonical } = await api.owner
      .selectFrom("ledgerEvent")
      .select("canonical")
      .where("subject", "=", person.id)
      .executeTakeFirstOrThrow();
    expect(canonical).not.toContain(person.name);
    expect(canonical).not.toContain(person.email);
  });

  it("is refused without writing or mailing anything", async () => {
    const before = await counts();
    expect((await add({ ...newcomer(), email: "engineer@marram.example" })).body.code).toBe("person.exists");
    expect((await add({ ...newcomer(), password: "not it" })).body.code).toBe("auth.password_wrong");
    expect((await add(newcomer(), "engineer")).body.code).toBe("auth.forbidden");
    expect((await api.call("POST", "/people", { body: newcomer() })).status).toBe(401);
    const bearer = await insertAccessKey(api.owner, api.people.admin.id);
    const byKey = await api.call("POST", "/people", { as: { bearer }, body: newcomer() });
    expect([byKey.status, byKey.body.code]).toEqual([403, "auth.session_required"]);
    const elsewhere = await api.call("POST", "/people", {
      as: "admin",
      body: newcomer(),
      headers: { origin: "http://elsewhere.example" },
    });
    expect(elsewhere.body.code).toBe("auth.origin_mismatch");
    expect(await counts()).toEqual(before);
  });

  it.each([
    ["/email", { email: "nobody" }],
    ["/name", { name: " " }],
    ["/roles/0", { roles: ["chief"] }],
    ["/password", { password: "" }],
  ])("answers 422 for a bad %s", async (path, values) => {
    const { status, body } = await add({ ...newcomer(), ...values });
    expect([status, body.errors[0].path]).toEqual([422, path]);
  });

  it("adds one of two with the same address at once", async () => {
    const body = newcomer();
    const replies = await Promise.all([add(body), add(body, "admin2")]);
    expect(replies.map((reply) => reply.status).sort()).toEqual([201, 409]);
  });

  async function counts() {
    const of = async (table: "person" | "mail" | "roleGrant") =>
      (
        await api.db
          .selectFrom(table)
          .select((eb) => eb.fn.countAll<string>().as("n"))
          .executeTakeFirstOrThrow()
      ).n;
    return [await of("person"), await of("mail"), await of("roleGrant")];
  }
});

describe("people", () => {
  it("are listed page by page, how they sign in for admins and auditors only", async () => {
    const first = await api.call("GET", "/people", { as: "auditor", query: { limit: 2 } });
    expect(first.body.items.map((one: { name: string }) => one.name)).toEqual(["engineer", "engineer2"]);
    expect(first.body.items[0].signIn).toMatchObject({ passwordChosen: true });
    const next = await api.call("GET", "/people", { as: "engineer", query: { limit: 1, cursor: first.body.next } });
    expect(next.body.items).toMatchObject([{ name: "reviewer", roles: ["reviewer"], signIn: null }]);
    expect((await api.call("GET", `/people/${api.people.operator.id}`, { as: "service" })).body.name).toBe("operator");
  });

  it("are not for operators or the public, and 404 where there is nobody", async () => {
    expect((await api.call("GET", "/people", { as: "operator" })).status).toBe(403);
    expect((await api.call("GET", "/people")).status).toBe(401);
    const nobody = await api.call("GET", "/people/018f0000-0000-7000-8000-000000000000", { as: "admin" });
    expect([nobody.status, nobody.body.code]).toEqual([404, "person.not_found"]);
    expect((await api.call("GET", "/people/nobody", { as: "admin" })).status).toBe(422);
  });
});

describe("a role that takes two admins", () => {
  const decide = (id: string, move: string, as: PersonName, role = "reviewer", body: object = signed) =>
    post(`/people/${id}/roles/${role}/${move}`, as, body);

  it("is held once a second admin confirms, and only then", async () => {
    const person = await added(["reviewer"]);
    const own = await decide(person.id, "confirm", "admin");
    expect([own.status, own.body.code]).toEqual([409, "person.second_admin_needed"]);
    expect((await decide(person.id, "confirm", "reviewer")).body.code).toBe("auth.forbidden");
    expect((await decide(person.id, "confirm", "admin2", "reviewer", { password: "no" })).body.code).toBe(
      "auth.password_wrong",
    );
    const done = await decide(person.id, "confirm", "admin2");
    expect(done.body).toMatchObject({ roles: ["reviewer"], pending: [] });
    expect(await actions(person.id)).toEqual(["person.added", "role.confirmed"]);
    expect((await decide(person.id, "confirm", "admin2")).body.code).toBe("role.not_found");
  });

  it("is refused by the other, or taken back by who asked", async () => {
    const one = await added(["admin"]);
    const refused = await decide(one.id, "refuse", "admin2", "admin", { ...signed, reason: "not yet" });
    expect(refused.body).toMatchObject({ roles: [], pending: [] });
    const other = await added(["admin"]);
    expect((await decide(other.id, "refuse", "admin", "admin")).status).toBe(200);
    expect((await decide(other.id, "refuse", "admin", "chief")).status).toBe(422);
  });

  it("is confirmed once by admins who come at once", async () => {
    const third = await arrived(["admin"]);
    await decide(third.id, "confirm", "admin2", "admin");
    const person = await added(["reviewer"], "admin2");
    const replies = await Promise.all([decide(person.id, "confirm", "admin"), decide(person.id, "refuse", "admin2")]);
    expect(replies.map((reply) => reply.status).sort()).toEqual([200, 404]);
    const decisions = (await actions(person.id)).filter((action) => action.startsWith("role."));
    expect(decisions).toHaveLength(1);
    await change(third.id, { active: false });
  });

  it("is nobody's own to change, ask or confirm", async () => {
    const own = await change(api.people.admin.id, { roles: ["admin", "engineer"] });
    expect([own.status, own.body.code]).toEqual([403, "person.own_roles"]);
    expect((await decide(api.people.admin.id, "confirm", "admin")).body.code).toBe("person.own_roles");
    expect((await change(api.people.admin.id, { active: false })).body.code).toBe("person.own_account");
  });
});

describe("changing a person", () => {
  it("takes roles away at once and asks for others", async () => {
    const person = await added(["engineer", "service"]);
    const { body } = await change(person.id, { name: "Another Name", roles: ["service", "reviewer", "reviewer"] });
    expect(body).toMatchObject({ name: "Another Name", roles: ["service"], pending: [{ role: "reviewer" }] });
    const again = await change(person.id, { roles: ["service", "reviewer"] });
    expect(again.body.pending).toHaveLength(1);
    const none = await change(person.id, { roles: [] });
    expect(none.body).toMatchObject({ roles: [], pending: [] });
  });

  it("takes a lost role's rights away in the middle of a session", async () => {
    expect((await api.call("GET", "/people", { as: "engineer2" })).status).toBe(200);
    await change(api.people.engineer2.id, { roles: ["operator"] });
    expect((await api.call("GET", "/people", { as: "engineer2" })).status).toBe(403);
    await change(api.people.engineer2.id, { roles: ["engineer"] });
  });

  it("deactivates: sessions, keys, links and the roles of two admins end at once", async () => {
    const bearer = await insertAccessKey(api.owner, api.people.reviewer2.id);
    expect((await api.call("GET", "/people", { as: { bearer } })).status).toBe(200);
    const { body } = await change(api.people.reviewer2.id, { active: false });
    expect(body).toMatchObject({ active: false, roles: [] });
    expect((await api.call("GET", "/people", { as: { bearer } })).status).toBe(401);
    expect((await api.call("GET", "/people", { as: "reviewer2" })).status).toBe(401);
    const roles = await change(api.people.reviewer2.id, { roles: ["reviewer"] });
    expect([roles.status, roles.body.code]).toEqual([409, "person.wrong_state"]);
    const back = await change(api.people.reviewer2.id, { active: true, roles: ["reviewer"] });
    expect(back.body).toMatchObject({ active: true, roles: [], pending: [{ role: "reviewer" }] });
    expect((await api.call("GET", "/people", { as: "reviewer2" })).status).toBe(401);
  });

  it("mends an address until a password is chosen, and sends the link there", async () => {
    const person = await added();
    const [first] = await listMailTo(api.db, person.email);
    const { body } = await change(person.id, { email: "mended@marram.example" });
    expect(body.email).toBe("mended@marram.example");
    const use = (mail: { body: string } | undefined) =>
      api.call("POST", "/account/links/use", {
        body: { token: tokenOf(mail), newPassword: "four words or some more" },
      });
    expect((await use(first)).body.code).toBe("link.used");
    expect((await use((await listMailTo(api.db, "mended@marram.example"))[0])).status).toBe(200);
    const late = await change(person.id, { email: "other@marram.example" });
    expect([late.status, late.body.code]).toEqual([409, "person.wrong_state"]);
    const taken = await change((await added()).id, { email: "engineer@marram.example" });
    expect(taken.body.code).toBe("person.exists");
  });

  it("answers 401, 403, 404 and 422", async () => {
    const id = api.people.service.id;
    expect((await api.call("PATCH", `/people/${id}`, { body: signed })).status).toBe(401);
    expect((await change(id, { name: "X" }, "auditor")).status).toBe(403);
    expect((await change(id, { name: "X", password: "no" })).body.code).toBe("auth.password_wrong");
    expect((await change("018f0000-0000-7000-8000-000000000000", { name: "X" })).body.code).toBe("person.not_found");
    expect((await change(id, {})).status).toBe(422);
    expect((await change(id, { newPassword: "set by an admin" })).status).toBe(422);
  });

  it("leaves one admin when two deactivate each other at once", async () => {
    // Through the service: by route the later one may be nobody before it begins, which is no race.
    const deactivate = (by: PersonName, other: PersonName) =>
      changePerson(api.ctx(by), api.people[other].id, { ...signed, active: false });
    const results = await Promise.allSettled([deactivate("admin", "admin2"), deactivate("admin2", "admin")]);
    expect(results.map((result) => result.status).sort()).toEqual(["fulfilled", "rejected"]);
    expect(results.find((result) => result.status === "rejected")).toMatchObject({
      reason: { code: "auth.forbidden" },
    });
    const left = results[0]?.status === "fulfilled" ? "admin" : "admin2";
    const people = await api.call("GET", "/people", { as: left, query: { limit: 1000 } });
    const admins = people.body.items.filter((one: { roles: string[] }) => one.roles.includes("admin"));
    expect(admins).toMatchObject([{ name: left }]);
    expect(people.body.warnings.map((one: { role: string }) => one.role)).toContain("admin");
    await confirmIdentity(api.ctx(left), signed);
  });
});
