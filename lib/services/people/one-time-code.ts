import { Secret, TOTP } from "otpauth";

const PERIOD_SECONDS = 30;

/** A time-based one-time password (RFC 6238: SHA-1, six digits, 30 s), as every authenticator app takes it. */
export function oneTimeOf(base32Secret: string, account: string): TOTP {
  const secret = Secret.fromBase32(base32Secret);
  return new TOTP({
    issuer: "Trimwright",
    label: account,
    algorithm: "SHA1",
    digits: 6,
    period: PERIOD_SECONDS,
    secret,
  });
}

/** A new secret of 160 random bits, in base32. */
export function newOneTimeSecret(): string {
  return new Secret({ size: 20 }).base32;
}

/** The time step that a code belongs to, one step early or late allowed; undefined for a wrong code. */
export function findOneTimeStep(base32Secret: string, code: string, now: Date): number | undefined {
  const delta = oneTimeOf(base32Secret, "").validate({ token: code, timestamp: now.getTime(), window: 1 });
  return delta === null ? undefined : Math.floor(now.getTime() / 1000 / PERIOD_SECONDS) + delta;
}
