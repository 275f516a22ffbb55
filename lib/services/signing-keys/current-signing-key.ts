import { readFileSync } from "node:fs";
import { keyIdOf, publicKeyPem } from "@/builders/bundle/release";
import type { Db } from "@/db/executor";
import { listSigningKeys, putKeyInUse } from "@/db/queries/signing-keys";
import { signingKeyFile } from "@/lib/env";

export interface CurrentSigningKey {
  /** First 16 hex digits of the SHA-256 of the key's SPKI DER. */
  id: string;
  /** PKCS #8; never leaves the process. */
  privatePem: string;
  /** SPKI. */
  publicPem: string;
}

/** The key that this installation signs with now, from its file. @throws AppError `release.key_not_ed25519`, `release.key_malformed` */
export function readSigningKey(): CurrentSigningKey {
  const privatePem = readFileSync(signingKeyFile(), "utf8");
  return { id: keyIdOf(privatePem), privatePem, publicPem: publicKeyPem(privatePem) };
}

/**
 * The key that this installation signs with, registered as the one in use: at its first use its period begins and that of
 * the key before it ends. Writes nothing where it is in use already.
 */
export async function ensureSigningKey(db: Db, at: Date): Promise<CurrentSigningKey> {
  const key = readSigningKey();
  const inUse = (await listSigningKeys(db)).filter((row) => row.untilAt === null);
  if (inUse.length !== 1 || inUse[0]?.id !== key.id) await putKeyInUse(db, { ...key, at });
  return key;
}
