import type { AuthOptions, User } from "next-auth";
import type { JWT } from "next-auth/jwt";
import CredentialsProvider from "next-auth/providers/credentials";
import { z } from "zod";
import { SESSION_HOURS } from "@/lib/domain/credentials";
import { localPath } from "@/lib/domain/local-path";
import { authSecret, env } from "@/lib/env";
import { AppError } from "@/lib/errors";
import { toAppError } from "@/lib/http/problem";
import { log } from "@/lib/log";
import { findSessionActor } from "@/lib/services/account/find-session-actor";
import { signIn } from "@/lib/services/account/sign-in";
import { signOut } from "@/lib/services/account/sign-out";
import type { Ctx } from "@/lib/services/context";
import { findSessionId, sessionToken } from "./session-token";
import { assertSignInRate, noteFailedSignIn } from "./sign-in-rate";

/** One request to next-auth, and what went wrong in it: the library itself passes errors on as words only. */
export interface AuthExchange {
  ctx: Ctx;
  headers: Headers;
  refusal?: AppError;
}

const MAX_AGE_SECONDS = SESSION_HOURS * 3600;

const credentials = z.object({
  email: z.string().trim().min(1).max(254),
  password: z.string().min(1).max(1000),
  oneTimeCode: z
    .string()
    .max(20)
    .transform((text) => text.replaceAll(/\s/g, "") || undefined)
    .optional(),
});

/** next-auth's settings for one request. The token carries the session's id and nothing else; the rest is looked up at every request. */
export function authOptions(exchange: AuthExchange): AuthOptions {
  return {
    secret: authSecret(),
    useSecureCookies: env().origin.startsWith("https:"),
    session: { strategy: "jwt", maxAge: MAX_AGE_SECONDS },
    // Its own pages are never shown.
    pages: { signIn: "/sign-in", error: "/sign-in", signOut: "/account" },
    providers: [
      CredentialsProvider({
        id: "credentials",
        name: "E-mail and password",
        credentials: { email: {}, password: {}, oneTimeCode: {} },
        authorize: (given) => refusing(exchange, () => authorize(exchange, given)),
      }),
    ],
    jwt: { encode: ({ token }) => sessionToken(sessionIdOf(token)), decode: () => decodeCookie(exchange) },
    callbacks: {
      jwt: ({ token, user }) => ({ sid: user?.id ?? token.sid }),
      session: ({ token }) => refusing(exchange, () => describeSession(exchange, token)),
      redirect: ({ url }) =>
        `${env().origin}${localPath(url.startsWith(env().origin) ? url.slice(env().origin.length) : url)}`,
    },
    events: { signOut: ({ token }) => refusing(exchange, () => endSession(exchange, token)) },
    logger: {
      error: (code) => log.debug({ code }, "next-auth"), // refusals; faults are logged where the exchange ends
      warn: (code) => log.warn({ code }, "next-auth"),
      debug: () => undefined,
    },
  };
}

/** Keeps what was thrown for the reply, before the library turns it into words or swallows it. */
async function refusing<T>(exchange: AuthExchange, work: () => Promise<T>): Promise<T> {
  try {
    return await work();
  } catch (thrown) {
    exchange.refusal = toAppError(thrown);
    throw new Error(exchange.refusal.code);
  }
}

/** next-auth calls whoever signs in a user; of ours it gets the session's id only. */
async function authorize({ ctx, headers }: AuthExchange, given: unknown): Promise<User> {
  const input = credentials.safeParse(given);
  if (!input.success) throw new AppError("auth.sign_in_failed", { message: "Enter your e-mail and your password." });
  await assertSignInRate(ctx.address);
  const earlierSessionId = await findSessionId(headers);
  const userAgent = headers.get("user-agent") ?? "";
  try {
    const { sessionId } = await signIn(ctx, { ...input.data, earlierSessionId, userAgent });
    return { id: sessionId };
  } catch (error) {
    if (error instanceof AppError && error.code !== "auth.code_required") await noteFailedSignIn(ctx.address);
    throw error;
  }
}

async function decodeCookie({ headers }: AuthExchange): Promise<JWT | null> {
  const sid = await findSessionId(headers);
  return sid === undefined ? null : { sid };
}

async function describeSession({ ctx }: AuthExchange, token: JWT) {
  const actor = await findSessionActor(ctx.db, sessionIdOf(token), ctx.now());
  if (actor === undefined) throw new AppError("auth.required", { message: "The session has ended; sign in again." });
  return { user: { name: actor.name, email: actor.email }, expires: actor.expiresAt.toISOString() };
}

async function endSession({ ctx }: AuthExchange, token: JWT | null): Promise<void> {
  if (token !== null) await signOut(ctx, sessionIdOf(token));
}

function sessionIdOf(token: JWT | undefined): string {
  return String(token?.sid ?? "");
}
