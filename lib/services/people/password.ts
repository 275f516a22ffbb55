import { randomBytes } from "node:crypto";
import { hash, verify } from "@node-rs/argon2";

/** Hashes a password with argon2id (19 MiB, 2 passes, 1 lane: the second recommended setting of the OWASP password storage cheat sheet). */
export function hashPassword(password: string): Promise<string> {
  return hash(password, { memoryCost: 19_456, timeCost: 2, parallelism: 1 });
}

let nobodysHash: Promise<string> | undefined;

/**
 * Whether the password belongs to the hash. Without a hash (no such person, or none set yet) it takes as long and is false,
 * so that the time of an answer doesn't tell which people exist.
 */
export async function isPasswordRight(passwordHash: string | null | undefined, password: string): Promise<boolean> {
  if (passwordHash) return verify(passwordHash, password);
  nobodysHash ??= hashPassword(randomBytes(24).toString("base64url"));
  await verify(await nobodysHash, password);
  return false;
}
