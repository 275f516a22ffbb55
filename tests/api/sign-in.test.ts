import { sql } from "kysely";
import { decode } from "next-auth/jwt";
import { v7 as uuidv7 } from "uuid";
import { afterEach, beforeAll, describe, expect, it } from "vitest";
import { sessionCookieName, sessionToken } from "@/lib/auth/session-token";
import { FAILURES_MAX, noteFailedSignIn } from "@/lib/auth/sign-in-rate";
import { authSecret, setEnv } from "@/lib/env";
import { listDemoAccounts } from "@/lib/services/account/list-demo-accounts";
import { newOneTimeSecret, oneTimeOf } from "@/lib/services/people/one-time-code";
import { insertAccessKey } from "../support/access-key";
import { openTestApi, type TestApi } from "../support/api";
import { openBrowser } from "../support/cookie-jar";
import { PASSWORD } from "../support/people";

const COOKIE = "next-auth.session-token";
const ORIGIN = "http://127.0.0.1:3000";
const right = (email: string) => ({ email, password: PASSWORD });

let api: TestApi;
beforeAll(async () => {
  api = await openTestApi();
});

async function accesses(kind: string) {
  return api.db.selectFrom("accessLog").selectAll().where("kind", "=", kind).orderBy("id").execute();
}

async function sessionsOf(personId: string) {
  return api.db.selectFrom("session").selectAll().where("personId", "=", personId).orderBy("createdAt").execute();
}

describe("signing in", () => {
  it("begins a session, notes it, and the token carries its id and nothing of the person", async () => {
    const browser = openBrowser(api, { "user-agent": "a test", "x-forwarded-for": "203.0.113.9, 198.51.100.7" });
    const reply = await browser.signIn(right(" Engineer@marram.example "));
    expect(reply.status).toBe(200);
    const token = browser.cookies.get(COOKIE) ?? "";
    const claims = await decode({ token, secret: authSecret() });
    expect(Object.keys(claims ?? {}).sort()).toEqual(["exp", "iat", "jti", "sid"]);
    const session = (await sessionsOf(api.people.engineer.id)).find((row) => row.id === claims?.sid);
    expect(session).toMatchObject({ endedAt: null, userAgent: "a test", address: "198.51.100.7" });
    expect((await accesses("sign-in")).at(-1)).toMatchObject({ personId: api.people.engineer.id });
    expect((await browser.call("GET", "/families")).status).toBe(200);
    expect((await browser.call("GET", "/api/auth/session")).body).toEqual({
      user: { name: "engineer", email: "engineer@marram.example" },
      expires: session?.expiresAt.toISOString(),
    });
  });

  it("sends a plain form on to the page it came from, and never to another site", async () => {
    const answers = [];
    for (const callbackUrl of [
      "/lots/MW20?tab=1",
      "https://elsewhere.example/",
      "//elsewhere.example",
      "/\\elsewhere.example",
    ]) {
      const browser = openBrowser(api);
      const body = { ...right("engineer@marram.example"), csrfToken: await browser.csrfToken(), callbackUrl };
      const headers = { "content-type": "application/x-www-form-urlencoded" };
      const form = new URLSearchParams(body).toString();
      const reply = await browser.call("POST", "/api/auth/callback/credentials", { body: form, headers });
      expect(reply.status).toBe(302);
      answers.push(reply.headers.get("location"));
    }
    expect(answers).toEqual([`${ORIGIN}/lots/MW20?tab=1`, `${ORIGIN}/today`, `${ORIGIN}/today`, `${ORIGIN}/today`]);
  });

  it("sends a refused plain form to the sign-in page with the code", async () => {
    const browser = openBrowser(api);
    const body = { email: "reviewer@marram.example", password: "no", csrfToken: await browser.csrfToken() };
    const reply = await browser.call("POST", "/api/auth/callback/credentials", { body });
    expect(reply.status).toBe(302);
    expect(reply.headers.get("location")).toBe(`${ORIGIN}/api/auth/error?error=auth.sign_in_failed`);
    const next = await browser.call("GET", "/api/auth/error?error=auth.sign_in_failed");
    expect(next.headers.get("location")).toBe("/sign-in?error=auth.sign_in_failed");
  });

  it("answers an unknown e-mail, a wrong password, no password yet and an inactive person alike, and counts each", async () => {
    const before = (await accesses("sign-in.failed")).length;
    await api.owner.updateTable("person").set({ active: false }).where("id", "=", api.people.service.id).execute();
    await api.owner
      .updateTable("person")
      .set({ passwordHash: null })
      .where("id", "=", api.people.operator.id)
      .execute();
    const fields = [
      { email: "nobody@marram.example", password: PASSWORD },
      { email: "engineer@marram.example", password: "wrong" },
      right("operator@marram.example"),
      right("service@marram.example"),
    ];
    const replies = [];
    for (const one of fields) {
      const browser = openBrowser(api);
      const { status, body } = await browser.signIn(one);
      const { instance, ...rest } = body;
      replies.push({ status, rest });
      expect(browser.cookies.has(COOKIE)).toBe(false);
    }
    expect(replies[0]).toMatchObject({ status: 401, rest: { code: "auth.sign_in_failed" } });
    for (const reply of replies) expect(reply).toEqual(replies[0]);
    const noted = (await accesses("sign-in.failed")).slice(before);
    const { engineer, operator, service } = api.people;
    expect(noted.map((row) => row.personId)).toEqual([null, engineer.id, operator.id, service.id]);
    expect(JSON.stringify(noted)).not.toContain("nobody@");
  });

  it("refuses a form without the token, with another's token, and one from another site", async () => {
    const browser = openBrowser(api);
    const fields = right("engineer@marram.example");
    const path = "/api/auth/callback/credentials";
    const other = await openBrowser(api).csrfToken();
    await browser.csrfToken();
    for (const csrfToken of [undefined, other]) {
      await browser.call("POST", path, { body: { ...fields, csrfToken } });
      expect(browser.cookies.has(COOKIE)).toBe(false);
    }
    const csrfToken = await browser.csrfToken();
    for (const origin of ["https://elsewhere.example", "null"]) {
      const reply = await browser.call("POST", path, { body: { ...fields, csrfToken }, headers: { origin } });
      expect(reply).toMatchObject({ status: 403, body: { code: "auth.origin_mismatch" } });
    }
  });

  it("has no use for the library's other actions, and bounds the form", async () => {
    const browser = openBrowser(api);
    expect((await browser.call("POST", "/api/auth/_log", { body: { level: "error", code: "x" } })).status).toBe(404);
    expect((await browser.call("POST", "/api/auth/session", { body: {} })).status).toBe(404);
    expect((await browser.call("GET", "/api/auth/signin")).headers.get("location")).toContain("/sign-in?");
    expect((await browser.call("GET", "/api/auth/signout")).headers.get("location")).toBe("/account");
    const reply = await browser.call("POST", "/api/auth/callback/credentials", { body: { email: "x".repeat(20_000) } });
    expect(reply).toMatchObject({ status: 413, body: { code: "request.too_large" } });
  });
});

describe("cookies", () => {
  afterEach(() => setEnv({ TRIMWRIGHT_ORIGIN: ORIGIN }));

  it("are out of scripts' reach and stay on the site", async () => {
    const browser = openBrowser(api);
    await browser.signIn(right("engineer@marram.example"));
    expect(browser.received.filter((line) => line.startsWith(`${COOKIE}=`))).toHaveLength(1);
    for (const line of browser.received) {
      expect(line).toMatch(/; HttpOnly/);
      expect(line).toMatch(/; SameSite=Lax/);
      expect(line).toMatch(/; Path=\//);
      expect(line).not.toMatch(/; Secure/);
    }
  });

  it("are kept to secure connections on an https origin", async () => {
    setEnv({ TRIMWRIGHT_ORIGIN: "https://trim.example" });
    expect(sessionCookieName()).toBe(`__Secure-${COOKIE}`);
    const browser = openBrowser(api);
    expect((await browser.signIn(right("engineer@marram.example"))).status).toBe(200);
    expect([...browser.cookies.keys()].sort()).toEqual([
      "__Host-next-auth.csrf-token",
      "__Secure-next-auth.callback-url",
      `__Secure-${COOKIE}`,
    ]);
    for (const line of browser.received) expect(line).toMatch(/; Secure/);
    expect((await browser.call("GET", "/families")).status).toBe(200);
  });

  it("never take over a session that was planted: each sign-in has its own, and ends the one it replaces", async () => {
    const browser = openBrowser(api);
    browser.cookies.set(COOKIE, await sessionToken(api.people.auditor.sessionId));
    await browser.signIn(right("engineer@marram.example"));
    const claims = await decode({ token: browser.cookies.get(COOKIE), secret: authSecret() });
    expect(claims?.sid).not.toBe(api.people.auditor.sessionId);
    expect((await sessionsOf(api.people.auditor.id))[0]?.endedAt).not.toBeNull();
  });
});

describe("signing out", () => {
  it("ends the session for every copy of its cookie, and notes it once", async () => {
    const browser = openBrowser(api);
    await browser.signIn(right("engineer@marram.example"));
    const copy = openBrowser(api);
    copy.cookies = new Map(browser.cookies);
    expect((await copy.call("GET", "/families")).status).toBe(200);
    expect((await browser.signOut()).status).toBe(200);
    expect(browser.cookies.has(COOKIE)).toBe(false);
    expect((await copy.call("GET", "/families")).status).toBe(401);
    const session = await copy.call("GET", "/api/auth/session");
    expect(session.body).toEqual({});
    expect(copy.cookies.has(COOKIE)).toBe(false);
    await browser.signOut();
    expect(await accesses("sign-out")).toMatchObject([{ personId: api.people.engineer.id }]);
  });

  it("is not done by a form without the token", async () => {
    const browser = openBrowser(api);
    await browser.signIn(right("engineer@marram.example"));
    await browser.call("POST", "/api/auth/signout", { body: { json: "true" } });
    await browser.call("GET", "/api/auth/signout");
    expect((await browser.call("GET", "/families")).status).toBe(200);
  });
});

describe("a one-time code", () => {
  const secret = newOneTimeSecret();
  const code = () => oneTimeOf(secret, "").generate();

  it("is asked for after the right password, and works once", async () => {
    const { id, email } = api.people.admin2;
    const enrolled = { oneTimeSecret: secret, oneTimeEnrolledAt: new Date() };
    await api.owner.updateTable("person").set(enrolled).where("id", "=", id).execute();
    const before = (await accesses("sign-in.failed")).length;
    const browser = openBrowser(api);
    const asked = await browser.signIn({ ...right(email), oneTimeCode: "" });
    expect(asked).toMatchObject({ status: 401, body: { code: "auth.code_required" } });
    expect(await accesses("sign-in.failed")).toHaveLength(before);
    const wrong = code() === "000000" ? "000001" : "000000";
    expect((await browser.signIn({ ...right(email), oneTimeCode: wrong })).body.code).toBe("auth.code_wrong");
    const once = code();
    const spaced = `${once.slice(0, 3)} ${once.slice(3)}`;
    expect((await browser.signIn({ ...right(email), oneTimeCode: spaced })).status).toBe(200);
    expect((await browser.signIn({ ...right(email), oneTimeCode: once })).body.code).toBe("auth.code_wrong");
    expect((await browser.signIn({ email, password: "wrong", oneTimeCode: code() })).body.code).toBe(
      "auth.sign_in_failed",
    );
  });
});

describe("the demo's accounts", () => {
  const anyone = () => ({ ...api.ctx("engineer"), actor: { kind: "public" } }) as const;

  it("are listed where the database holds them, without people that an admin added", async () => {
    const before = await listDemoAccounts(anyone());
    expect(before[0]).toEqual({ email: "engineer@marram.example", name: "engineer", roles: ["engineer"] });
    const added = { id: uuidv7(), email: "new@marram.example", name: "New", createdAt: new Date() };
    await api.owner
      .insertInto("person")
      .values({ ...added, createdBy: api.people.admin.id })
      .execute();
    expect(await listDemoAccounts(anyone())).toEqual(before);
    await api.owner.updateTable("person").set({ email: sql`replace(email, 'marram', 'maker')` }).execute();
    expect(await listDemoAccounts(anyone())).toEqual([]);
    await api.owner.updateTable("person").set({ email: sql`replace(email, 'maker', 'marram')` }).execute();
  });
});

describe("many failures", () => {
  it("lock an address that may be nobody's as well as an account, even when sent at once", async () => {
    for (const email of ["reviewer2@marram.example", "invented@marram.example"]) {
      const browser = openBrowser(api);
      const csrfToken = await browser.csrfToken();
      const body = { email, password: "wrong", csrfToken, json: "true" };
      const guess = () => browser.call("POST", "/api/auth/callback/credentials", { body });
      const codes = (await Promise.all(Array.from({ length: 14 }, guess))).map((reply) => reply.body.code).sort();
      expect(codes.filter((one) => one === "auth.sign_in_failed")).toHaveLength(10);
      expect(codes.filter((one) => one === "auth.too_many_attempts")).toHaveLength(4);
      const late = await browser.signIn({ email, password: PASSWORD });
      expect(late.status).toBe(429);
      expect(Number(late.headers.get("retry-after"))).toBeGreaterThan(0);
    }
    expect((await openBrowser(api).signIn(right("reviewer@marram.example"))).status).toBe(200);
  });

  it("from one network are slowed down, whichever accounts they try", async () => {
    const from = (address: string) => openBrowser(api, { "x-forwarded-for": address });
    const spraying = from("203.0.113.50");
    // All but the last are noted without hashing a password for each: what counts is that the last one is noted by itself.
    for (let n = 1; n < FAILURES_MAX; n += 1) await noteFailedSignIn("203.0.113.50");
    expect((await spraying.signIn({ email: "person100@marram.example", password: "spring" })).status).toBe(401);
    expect((await spraying.signIn(right("reviewer@marram.example"))).status).toBe(429);
    expect((await from("203.0.113.51").signIn(right("reviewer@marram.example"))).status).toBe(200);
  });
});

describe("a role", () => {
  it("that was taken away acts at once, and so does a person made inactive", async () => {
    const browser = openBrowser(api);
    await browser.signIn(right("engineer2@marram.example"));
    const write = () => browser.call("POST", "/equipment", { body: {} });
    expect((await write()).status).toBe(422);
    const { id } = api.people.engineer2;
    await api.owner.updateTable("roleGrant").set({ endedAt: new Date() }).where("personId", "=", id).execute();
    expect(await write()).toMatchObject({ status: 403, body: { code: "auth.forbidden" } });
    expect((await browser.call("GET", "/families")).status).toBe(403);
    await api.owner.updateTable("person").set({ active: false }).where("id", "=", id).execute();
    expect((await browser.call("GET", "/families")).status).toBe(401);
  });
});

describe("the origin of a call that changes something", () => {
  it("has to be the site's own with a session, and doesn't matter with a bearer key", async () => {
    const write = (options: object) => api.call("POST", "/equipment", { body: {}, ...options });
    const elsewhere = { origin: "https://elsewhere.example" };
    const cookie = `${COOKIE}=${await sessionToken(api.people.engineer.sessionId)}`;
    const refusal = { status: 403, body: { code: "auth.origin_mismatch" } };
    expect(await write({ as: "engineer", headers: elsewhere })).toMatchObject(refusal);
    expect(await write({ headers: { cookie } })).toMatchObject(refusal);
    expect(await write({ headers: { cookie, origin: `${ORIGIN}.elsewhere.example` } })).toMatchObject(refusal);
    expect((await write({ as: "engineer" })).status).toBe(422);
    const bearer = await insertAccessKey(api.owner, api.people.engineer.id);
    expect((await write({ as: { bearer }, headers: elsewhere })).status).toBe(422);
    expect((await write({ as: { bearer } })).status).toBe(422);
    // A wrong key beside a good cookie is nobody: what a caller shows first is what counts.
    expect((await write({ as: { bearer: "twp_wrong" }, headers: { cookie, origin: ORIGIN } })).status).toBe(401);
  });
});

describe("a dead database", () => {
  it("signs nobody in or out, and says so", async () => {
    const browser = openBrowser(api);
    await browser.signIn(right("reviewer@marram.example"));
    const { closeDb } = await import("@/db/client");
    const url = process.env.DATABASE_URL ?? "";
    await closeDb();
    setEnv({ DATABASE_URL: url.replace(/:\d+\//, ":1/") });
    try {
      expect(await browser.signOut()).toMatchObject({ status: 503, body: { code: "database.unavailable" } });
      expect(browser.cookies.has(COOKIE)).toBe(true);
      const reply = await openBrowser(api).signIn(right("reviewer@marram.example"));
      expect(reply).toMatchObject({ status: 503, body: { code: "database.unavailable" } });
      expect((await browser.call("GET", "/api/auth/session")).status).toBe(503);
    } finally {
      await closeDb();
      setEnv({ DATABASE_URL: url });
    }
    expect((await browser.call("GET", "/families")).status).toBe(200);
  });
});
