import { getDb } from "@/db/client";
import { findKeyActor } from "@/lib/services/account/find-key-actor";
import { findSessionActor } from "@/lib/services/account/find-session-actor";
import type { Actor } from "@/lib/services/context";
import { findSessionId } from "./session-token";

const BEARER = /^Bearer +(\S+)$/i;

/**
 * Who sends a request, looked up in the database every time, so that sign-out and lost roles act at once.
 * A bearer key goes before a cookie. A credential that is wrong, expired, revoked or of an inactive person counts as none.
 */
export async function resolveActor(headers: Headers): Promise<Actor> {
  const authorization = headers.get("authorization");
  const now = new Date();
  if (authorization !== null) {
    const key = BEARER.exec(authorization)?.[1];
    return (key && (await findKeyActor(getDb(), key, now))) || { kind: "public" };
  }
  const sessionId = await findSessionId(headers);
  return (sessionId && (await findSessionActor(getDb(), sessionId, now))) || { kind: "public" };
}
