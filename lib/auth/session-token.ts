import { NextRequest } from "next/server";
import { decode, encode } from "next-auth/jwt";
import { z } from "zod";
import { SESSION_HOURS } from "@/lib/domain/credentials";
import { authSecret, env } from "@/lib/env";

const MAX_AGE_SECONDS = SESSION_HOURS * 3600;
const claims = z.object({ sid: z.uuid() });

/** Name of the session cookie; browsers keep the prefixed one to secure connections. */
export function sessionCookieName(): string {
  return `${env().origin.startsWith("https:") ? "__Secure-" : ""}next-auth.session-token`;
}

/** The session's id from the request's cookie; undefined where there is none, or one that we did not make or that expired. */
export async function findSessionId(headers: Headers): Promise<string | undefined> {
  const token = new NextRequest(env().origin, { headers }).cookies.get(sessionCookieName())?.value;
  if (token === undefined) return undefined;
  try {
    return claims.safeParse(await decode({ token, secret: authSecret() })).data?.sid;
  } catch {
    return undefined; // not decryptable with our secret, or past its time: the same as no cookie
  }
}

/** A token as the sign-in puts it into the cookie. It carries the session's id and nothing else. */
export function sessionToken(sessionId: string): Promise<string> {
  return encode({ token: { sid: sessionId }, secret: authSecret(), maxAge: MAX_AGE_SECONDS });
}
