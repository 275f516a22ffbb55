/** The people of tests: one of each role, with sessions, and a second engineer, reviewer and admin. */
import { hash } from "@node-rs/argon2";
import { v7 as uuidv7 } from "uuid";
import type { Db } from "@/db/executor";
import type { Role } from "@/lib/domain/roles";
import type { PersonActor } from "@/lib/services/context";

export const PASSWORD = "trim-demo-2026";

const ROLE_OF = {
  engineer: "engineer",
  engineer2: "engineer",
  reviewer: "reviewer",
  reviewer2: "reviewer",
  operator: "operator",
  service: "service",
  auditor: "auditor",
  admin: "admin",
  admin2: "admin",
} as const satisfies Record<string, Role>;

export type PersonName = keyof typeof ROLE_OF;
export const PERSON_NAMES = Object.keys(ROLE_OF) as PersonName[];
export type TestPeople = Record<PersonName, PersonActor & { email: string; sessionId: string }>;

/** Adds everybody, each with one role and a session that lasts an hour. */
export async function addPeople(db: Db): Promise<TestPeople> {
  // The cheapest setting that argon2 allows: these passwords guard nothing, and every decision of a test asks for one.
  const passwordHash = await hash(PASSWORD, { memoryCost: 64, timeCost: 1 });
  const people = {} as TestPeople;
  for (const name of PERSON_NAMES) people[name] = await addPerson(db, name, passwordHash);
  return people;
}

async function addPerson(db: Db, name: PersonName, passwordHash: string): Promise<TestPeople[PersonName]> {
  const now = new Date();
  const id = uuidv7();
  const sessionId = uuidv7();
  const email = `${name}@marram.example`;
  const role = ROLE_OF[name];
  await db.insertInto("person").values({ id, email, name, passwordHash, createdAt: now }).execute();
  await db
    .insertInto("roleGrant")
    .values({ id: uuidv7(), personId: id, role, askedAt: now, confirmedAt: now })
    .execute();
  const expiresAt = new Date(now.getTime() + 3_600_000);
  await db
    .insertInto("session")
    .values({ id: sessionId, personId: id, createdAt: now, expiresAt, lastSeenAt: now })
    .execute();
  return { kind: "person", id, name, email, roles: [role], via: "session", sessionId };
}
