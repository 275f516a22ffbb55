import type { Db } from "@/db/executor";
import { AppError } from "@/lib/errors";

export interface SigningKeyRow {
  /** First 16 hex digits of the SHA-256 of the SPKI DER. */
  id: string;
  publicPem: string;
  fromAt: Date;
  untilAt: Date | null;
}

/** Every key that ever signed here, oldest first. */
export function listSigningKeys(db: Db): Promise<SigningKeyRow[]> {
  return db
    .selectFrom("signingKey")
    .select(["id", "publicPem", "fromAt", "untilAt"])
    .orderBy("fromAt")
    .orderBy("id")
    .execute();
}

/** A registered key. @throws AppError `signing-key.not_found` */
export function getSigningKey(db: Db, id: string): Promise<SigningKeyRow> {
  return db
    .selectFrom("signingKey")
    .select(["id", "publicPem", "fromAt", "untilAt"])
    .where("id", "=", id)
    .executeTakeFirstOrThrow(() => new AppError("signing-key.not_found", { id }));
}

/** Makes a key the one in use: registers it where it is new, reopens its period where it was used before, and ends that of every other. */
export async function putKeyInUse(db: Db, key: { id: string; publicPem: string; at: Date }): Promise<void> {
  await db
    .insertInto("signingKey")
    .values({ id: key.id, publicPem: key.publicPem, fromAt: key.at, untilAt: null })
    .onConflict((conflict) => conflict.column("id").doUpdateSet({ untilAt: null }))
    .execute();
  await db
    .updateTable("signingKey")
    .set({ untilAt: key.at })
    .where("id", "!=", key.id)
    .where("untilAt", "is", null)
    .execute();
}
