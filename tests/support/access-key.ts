import { createHash } from "node:crypto";
import { v7 as uuidv7 } from "uuid";
import type { Db } from "@/db/executor";
import { ACCESS_KEY_PREFIX } from "@/lib/domain/credentials";

/** A bearer key of a person, written past the service that makes keys. @returns the key in clear */
export async function insertAccessKey(owner: Db, personId: string): Promise<string> {
  const key = `${ACCESS_KEY_PREFIX}${"k".repeat(20)}${uuidv7().replaceAll("-", "")}`;
  const now = new Date();
  await owner
    .insertInto("accessKey")
    .values({
      id: uuidv7(),
      personId,
      name: "a test's",
      keyHash: createHash("sha256").update(key).digest(),
      prefix: key.slice(0, 10),
      createdAt: now,
      expiresAt: new Date(now.getTime() + 3_600_000),
    })
    .execute();
  return key;
}
