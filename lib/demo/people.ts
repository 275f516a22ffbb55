import { v7 } from "uuid";
import type { Db } from "@/db/executor";
import { DEMO_DOMAIN, DEMO_PASSWORD } from "@/lib/domain/demo-accounts";
import type { Role } from "@/lib/domain/roles";
import { appendEvent } from "@/lib/services/ledger/append-event";
import { hashPassword } from "@/lib/services/people/password";
import type { DemoClock } from "./story";

/** Accounts at marram.example with their names and roles, in the order in which a start prints them. */
const ACCOUNTS = {
  engineer: ["Hanne Brook", "engineer"],
  engineer2: ["Tomas Fell", "engineer"],
  reviewer: ["Ines Harrow", "reviewer"],
  reviewer2: ["Ruben Tarn", "reviewer"],
  operator: ["Lotte Quay", "operator"],
  service: ["Peer Lock", "service"],
  auditor: ["Maud Keel", "auditor"],
  admin: ["Oda Sluice", "admin"],
  admin2: ["Bram Weir", "admin"],
} as const satisfies Record<string, readonly [name: string, role: Role]>;

export type DemoPersonName = keyof typeof ACCOUNTS;
export type DemoPeople = Record<DemoPersonName, { id: string; name: string; roles: readonly Role[] }>;

/**
 * Adds the accounts with their password, which no service does: people choose theirs by a mailed link.
 * Each has an event in the ledger, as every other person has.
 */
export async function addDemoPeople(db: Db, clock: DemoClock): Promise<DemoPeople> {
  const passwordHash = await hashPassword(DEMO_PASSWORD);
  const people = {} as DemoPeople;
  for (const [account, [name, role]] of Object.entries(ACCOUNTS)) {
    const id = clock.newId();
    await db.transaction().execute(async (trx) => {
      const at = clock.now();
      const email = `${account}@${DEMO_DOMAIN}`;
      await trx.insertInto("person").values({ id, email, name, passwordHash, createdAt: at }).execute();
      await trx
        .insertInto("roleGrant")
        .values({ id: clock.newId(), personId: id, role, askedAt: at, confirmedAt: at })
        .execute();
      const system = { db, actor: { kind: "system" as const }, now: clock.now, newId: clock.newId };
      const ctx = { ...system, requestId: v7(), address: "" };
      await appendEvent(ctx, trx, { action: "person.added", subject: id, data: { roles: [role] }, texts: { name } });
    });
    people[account as DemoPersonName] = { id, name, roles: [role] };
  }
  return people;
}
