import { afterAll, beforeAll, beforeEach, describe, expect, it } from "vitest";
import { setEnv } from "@/lib/env";
import { openTestApi, type TestApi } from "../support/api";
import { listMailTo, tokenOf } from "../support/mail";
import { openMailServer, type TestMailServer } from "../support/mail-server";
import { PASSWORD, type PersonName } from "../support/people";

let api: TestApi;
let server: TestMailServer;
beforeAll(async () => {
  api = await openTestApi();
  server = await openMailServer();
});
beforeEach(() => setEnv({ SMTP_URL: "" }));
afterAll(async () => {
  setEnv({ SMTP_URL: "" });
  await server.close();
});

let count = 0;
/** Somebody new, to whom a message with a link is queued. */
async function welcomed(name = "Nora Ostrand <&>"): Promise<string> {
  count += 1;
  const email = `mail${count}@marram.example`;
  await api.call("POST", "/people", { as: "admin", body: { name, email, roles: [], password: PASSWORD } });
  return email;
}
const shown = async (email: string, as: PersonName = "admin") => {
  const [mail] = await listMailTo(api.db, email);
  return (await api.call("GET", `/mail/${mail?.id}`, { as })).body;
};
const again = (id: string, as: PersonName = "admin") => api.call("POST", `/mail/${id}/send`, { as });

describe("without a mail server", () => {
  it("a message waits, then is kept here with its link to be read", async () => {
    const email = await welcomed();
    expect(await shown(email)).toMatchObject({ state: "waiting", to: email, attempts: 0 });
    await api.runJobs();
    const mail = await shown(email);
    expect(mail).toMatchObject({ state: "kept", sentAt: null, lastError: null });
    expect(mail.body).toContain(`http://127.0.0.1:3000/welcome/${tokenOf(mail)}`);
  });

  it("is left out where the request that queued it was refused", async () => {
    const { n } = await api.db
      .selectFrom("mail")
      .select((eb) => eb.fn.countAll<string>().as("n"))
      .executeTakeFirstOrThrow();
    const body = { name: "X", email: "engineer@marram.example", roles: [], password: PASSWORD };
    expect((await api.call("POST", "/people", { as: "admin", body })).status).toBe(409);
    expect(await api.runJobs()).toBe(0);
    const after = await api.db
      .selectFrom("mail")
      .select((eb) => eb.fn.countAll<string>().as("n"))
      .executeTakeFirstOrThrow();
    expect(after.n).toBe(n);
  });
});

describe("with a mail server", () => {
  beforeEach(() => setEnv({ SMTP_URL: server.url, MAIL_FROM: "Marram Weighing Works <trimwright@marram.example>" }));

  it("a message goes out as text and HTML, and its link is blotted out here", async () => {
    const email = await welcomed();
    const [queued] = await listMailTo(api.db, email);
    const token = tokenOf(queued);
    await api.runJobs();
    const mail = server.received.at(-1);
    expect(mail?.from?.text).toBe('"Marram Weighing Works" <trimwright@marram.example>');
    expect(mail?.to).toMatchObject({ text: email });
    expect(mail?.subject).toBe("Choose your password for Trimwright");
    expect(mail?.messageId).toBe(`<${queued?.id}@127.0.0.1>`);
    expect(mail?.headers.get("auto-submitted")).toBe("auto-generated");
    expect(mail?.text).toContain(`http://127.0.0.1:3000/welcome/${token}`);
    expect(mail?.text).toContain("Good day Nora Ostrand <&>,");
    expect(mail?.html).toContain(`<a href="http://127.0.0.1:3000/welcome/${token}">`);
    expect(mail?.html).toContain("Good day Nora Ostrand &lt;&amp;&gt;,");
    const kept = await shown(email);
    expect(kept).toMatchObject({ state: "sent", attempts: 1 });
    expect(kept.body).toContain("/welcome/…");
    expect(JSON.stringify(kept)).not.toContain(token);
  });

  it("a refused message says why, is tried again and then goes out once", async () => {
    const email = await welcomed();
    server.refuseWith = "mailbox full";
    const before = server.received.length;
    await expect(api.runJobs()).rejects.toThrow(/mailbox full/);
    expect(await shown(email)).toMatchObject({
      state: "failed",
      attempts: 1,
      lastError: expect.stringContaining("mailbox full"),
    });
    server.refuseWith = undefined;
    await api.db.executeQuery(makeRetriesDue());
    await api.runJobs();
    expect(await shown(email)).toMatchObject({ state: "sent", attempts: 2, lastError: null });
    expect(server.received.length).toBe(before + 1);
  });

  it("a server that is not there is a failure with its reason", async () => {
    setEnv({ SMTP_URL: "smtp://127.0.0.1:9" });
    const email = await welcomed();
    await expect(api.runJobs()).rejects.toThrow(/ECONNREFUSED/);
    expect(await shown(email)).toMatchObject({ state: "failed", lastError: expect.stringContaining("ECONNREFUSED") });
  });

  it("a message that did not get out is sent again by an admin, once", async () => {
    setEnv({ SMTP_URL: "" });
    const email = await welcomed();
    await api.runJobs();
    setEnv({ SMTP_URL: server.url });
    const { id } = await shown(email);
    const replies = await Promise.all([again(id), again(id, "admin2")]);
    expect(replies.map((reply) => reply.status).sort()).toEqual([202, 409]);
    await api.runJobs();
    expect(await shown(email)).toMatchObject({ state: "sent" });
    const sent = await again(id);
    expect([sent.status, sent.body.code]).toEqual([409, "mail.wrong_state"]);
    expect(server.received.filter((mail) => mail.messageId === `<${id}@127.0.0.1>`)).toHaveLength(1);
  });

  /** pg-boss waits some seconds before it takes a failed job up again; the test doesn't. */
  function makeRetriesDue() {
    return api.db
      .withSchema("pgboss")
      .updateTable("job" as never)
      .set({ startAfter: new Date(0) } as never)
      .where("state" as never, "=", "retry" as never)
      .compile();
  }
});

describe("the list of messages", () => {
  it("is there for admins in a browser, newest first, page by page", async () => {
    const last = await welcomed();
    const { body } = await api.call("GET", "/mail", { as: "admin", query: { limit: 1 } });
    expect(body.items).toMatchObject([{ to: last, template: "welcome" }]);
    expect(body.items[0].body).toBeUndefined();
    const next = await api.call("GET", "/mail", { as: "admin2", query: { limit: 1, cursor: body.next } });
    expect(next.body.items[0].id < body.items[0].id).toBe(true);
  });

  it("answers 401, 403, 404 and 422", async () => {
    expect((await api.call("GET", "/mail")).status).toBe(401);
    expect((await api.call("GET", "/mail", { as: "auditor" })).status).toBe(403);
    const { id } = await shown(await welcomed());
    expect((await api.call("GET", `/mail/${id}`, { as: "reviewer" })).status).toBe(403);
    expect((await again(id, "engineer")).status).toBe(403);
    expect((await api.call("GET", "/mail/018f0000-0000-7000-8000-000000000000", { as: "admin" })).body.code).toBe(
      "mail.not_found",
    );
    expect((await api.call("GET", "/mail", { as: "admin", query: { cursor: "x" } })).status).toBe(422);
  });
});
