import { RateLimiterMemory } from "rate-limiter-flexible";
import { AppError } from "@/lib/errors";

/** Failed sign-ins that one network address may cause; a site behind one address stays well below it. */
export const FAILURES_MAX = 100;
const WINDOW_SECONDS = 15 * 60;

/**
 * Slows down who tries one password on many accounts, which the count against each account doesn't see. In this process's
 * memory: the strict count is the one in the database.
 */
const failures = new RateLimiterMemory({ points: FAILURES_MAX, duration: WINDOW_SECONDS });

/** @throws AppError `auth.too_many_attempts` {retryAfterSeconds} */
export async function assertSignInRate(address: string): Promise<void> {
  const noted = await failures.get(address);
  if (noted === null || noted.consumedPoints < FAILURES_MAX) return;
  throw new AppError("auth.too_many_attempts", {
    retryAfterSeconds: Math.ceil(noted.msBeforeNext / 1000),
    message: "Too many failed sign-ins came from your network; wait a quarter of an hour.",
  });
}

export async function noteFailedSignIn(address: string): Promise<void> {
  await failures.penalty(address);
}
