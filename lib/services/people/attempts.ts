import { type AccessKind, countAttempts, deleteAccess, insertAccess, lockAttempts } from "@/db/queries/access-log";
import { AppError } from "@/lib/errors";
import type { Ctx } from "@/lib/services/context";

export const ATTEMPTS_MAX = 10;
export const ATTEMPTS_WINDOW_MINUTES = 15;

/** What attempts are counted against: a person, or the hash of an e-mail address that may be nobody's. */
export interface AttemptSubject {
  kind: AccessKind;
  subject: string;
  personId: string | null;
}

/**
 * Runs a guess that may fail. It is noted as failed before it runs, in a transaction of its own, and the note is taken
 * back when it was right: guesses sent at the same time can't get past the count together.
 * @throws AppError `auth.too_many_attempts` {retryAfterSeconds} after {@link ATTEMPTS_MAX} failures within the window
 */
export async function countedAttempt<T>(ctx: Ctx, against: AttemptSubject, guess: () => Promise<T>): Promise<T> {
  const noted = await noteAttempt(ctx, against);
  const result = await guess();
  await deleteAccess(ctx.db, noted);
  return result;
}

function noteAttempt(ctx: Ctx, { kind, subject, personId }: AttemptSubject): Promise<string> {
  const at = ctx.now();
  const windowMs = ATTEMPTS_WINDOW_MINUTES * 60_000;
  return ctx.db.transaction().execute(async (trx) => {
    await lockAttempts(trx, kind, subject);
    if ((await countAttempts(trx, kind, subject, new Date(at.getTime() - windowMs))) >= ATTEMPTS_MAX) {
      throw new AppError("auth.too_many_attempts", {
        retryAfterSeconds: windowMs / 1000,
        message: `Too many wrong passwords or codes; wait ${ATTEMPTS_WINDOW_MINUTES} minutes.`,
      });
    }
    return insertAccess(trx, { at, kind, personId, address: ctx.address, detail: { subject } });
  });
}
