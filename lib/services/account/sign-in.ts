import { createHash } from "node:crypto";
import { insertAccess } from "@/db/queries/access-log";
import { type Credential, findCredentialByEmail } from "@/db/queries/people";
import { endSession, insertSession } from "@/db/queries/sessions";
import { SESSION_HOURS } from "@/lib/domain/credentials";
import { AppError } from "@/lib/errors";
import type { Ctx } from "@/lib/services/context";
import { countedAttempt } from "@/lib/services/people/attempts";
import { assertOneTimeCode } from "@/lib/services/people/confirm-identity";
import { isPasswordRight } from "@/lib/services/people/password";

export interface SignIn {
  email: string;
  password: string;
  oneTimeCode?: string | undefined;
  userAgent: string;
  /** The session that this browser had before; it ends, so that no second one is left behind. */
  earlierSessionId?: string | undefined;
}

export interface StartedSession {
  sessionId: string;
  personId: string;
  expiresAt: Date;
}

const USER_AGENT_MAX = 300;

/**
 * Begins a browser session. Failures are counted against the e-mail address, whether it is somebody's or not, and kept in the
 * access log; an unknown address, a wrong password and an inactive person look and last the same.
 * @throws AppError `auth.sign_in_failed`, `auth.code_required` (the password was right, a code is missing), `auth.code_wrong`,
 * `auth.too_many_attempts`
 */
export async function signIn(ctx: Ctx, input: SignIn): Promise<StartedSession> {
  const email = input.email.trim().toLowerCase();
  const credential = await findCredentialByEmail(ctx.db, email);
  const subject = createHash("sha256").update(email).digest("hex");
  const against = { kind: "sign-in.failed", subject, personId: credential?.personId ?? null } as const;
  const proven = await countedAttempt(ctx, against, () => prove(ctx, credential, input));
  if (proven === "code missing") {
    throw new AppError("auth.code_required", { message: "Enter the one-time code from your app." });
  }
  return startSession(ctx, proven.personId, input);
}

/** A missing code is no failure: whoever asks has just given the right password and is now asked for the second thing. */
async function prove(
  ctx: Ctx,
  credential: Credential | undefined,
  input: SignIn,
): Promise<Credential | "code missing"> {
  const right = await isPasswordRight(credential?.active ? credential.passwordHash : undefined, input.password);
  if (!right || credential === undefined) {
    throw new AppError("auth.sign_in_failed", { message: "E-mail or password is wrong. Check both and try again." });
  }
  if (credential.oneTimeEnrolledAt !== null && !input.oneTimeCode) return "code missing";
  await assertOneTimeCode(ctx, credential, input.oneTimeCode);
  return credential;
}

async function startSession(ctx: Ctx, personId: string, input: SignIn): Promise<StartedSession> {
  const now = ctx.now();
  const sessionId = ctx.newId();
  const expiresAt = new Date(now.getTime() + SESSION_HOURS * 3_600_000);
  await ctx.db.transaction().execute(async (trx) => {
    if (input.earlierSessionId) await endSession(trx, input.earlierSessionId, now);
    const userAgent = input.userAgent.slice(0, USER_AGENT_MAX);
    await insertSession(trx, { id: sessionId, personId, createdAt: now, expiresAt, userAgent, address: ctx.address });
    await insertAccess(trx, { at: now, kind: "sign-in", personId, address: ctx.address });
  });
  return { sessionId, personId, expiresAt };
}
