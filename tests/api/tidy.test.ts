import { createHash } from "node:crypto";
import { v7 as uuidv7 } from "uuid";
import { beforeAll, expect, it } from "vitest";
import { enqueue } from "@/lib/jobs/enqueue";
import { openTestApi, type TestApi } from "../support/api";

let api: TestApi;
beforeAll(async () => {
  api = await openTestApi();
});

const daysAgo = (days: number) => new Date(Date.now() - days * 86_400_000);
const hash = (text: string) => createHash("sha256").update(text).digest();

it("deletes what is past its time and leaves the rest, however often it runs", async () => {
  const personId = api.people.engineer.id;
  await addRows(personId, { session: 31, link: 8, access: 91, reply: 1.1, mail: 91 });
  const kept = await addRows(personId, { session: 29, link: 6, access: 89, reply: 0.9, mail: 89 });
  for (const _run of [1, 2]) {
    await api.db.transaction().execute((trx) => enqueue(trx, "tidy", {}));
    await api.runJobs();
    expect(await idsThere()).toEqual(kept);
  }
  expect((await api.call("GET", "/account", { as: "engineer" })).status).toBe(200);
});

interface Ages {
  session: number;
  link: number;
  access: number;
  reply: number;
  mail: number;
}

/** One row of each kind that ended so many days ago. @returns what tells each from the others */
async function addRows(personId: string, ages: Ages) {
  const [session, mail] = [uuidv7(), uuidv7()];
  const endedAt = daysAgo(ages.session);
  await api.db
    .insertInto("session")
    .values({ id: session, personId, createdAt: daysAgo(100), expiresAt: endedAt, lastSeenAt: endedAt })
    .execute();
  const link = hash(`link ${ages.link}`);
  await api.db
    .insertInto("passwordLink")
    .values({
      tokenHash: link,
      personId,
      purpose: "reset",
      createdAt: daysAgo(100),
      expiresAt: daysAgo(0),
      usedAt: daysAgo(ages.link),
    })
    .execute();
  await api.db
    .insertInto("accessLog")
    .values({ at: daysAgo(ages.access), kind: "sign-in", personId, address: `${ages.access}` })
    .execute();
  const key = `${ages.reply}`;
  await api.db
    .insertInto("idempotentReply")
    .values({ actorId: personId, route: "x", key, bodySha256: hash(key), createdAt: daysAgo(ages.reply) })
    .execute();
  const words = { toAddress: "a@marram.example", template: "x", subject: "x", body: "x" };
  await api.db
    .insertInto("mail")
    .values({ id: mail, ...words, createdAt: daysAgo(ages.mail) })
    .execute();
  return { session: [session], link: [link.toString("hex")], access: [`${ages.access}`], reply: [key], mail: [mail] };
}

async function idsThere() {
  const sessions = await api.db.selectFrom("session").select("id").where("expiresAt", "<", new Date()).execute();
  const links = await api.db.selectFrom("passwordLink").select("tokenHash").execute();
  const accesses = await api.db.selectFrom("accessLog").select("address").execute();
  const replies = await api.db.selectFrom("idempotentReply").select("key").execute();
  const mails = await api.db.selectFrom("mail").select("id").execute();
  return {
    session: sessions.map((row) => row.id),
    link: links.map((row) => row.tokenHash.toString("hex")),
    access: accesses.map((row) => row.address),
    reply: replies.map((row) => row.key),
    mail: mails.map((row) => row.id),
  };
}
