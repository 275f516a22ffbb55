/** What bearer keys look like and how long things last. A key says what it is, so that a leaked one is recognised. */
export const ACCESS_KEY_PREFIX = "twp_";
export const STATION_KEY_PREFIX = "tws_";

/** Seconds between two notes of "last seen"; finer would write at every poll. */
export const LAST_USED_STEP_SECONDS = 60;

/** A session ends 12 hours after sign-in, used or not: a shift, with its overlap. */
export const SESSION_HOURS = 12;

/** Whether "last used" should be written anew. */
export function isDueForTouch(lastUsedAt: Date | null, now: Date): boolean {
  return lastUsedAt === null || now.getTime() - lastUsedAt.getTime() >= LAST_USED_STEP_SECONDS * 1000;
}
