import { findPasswordFault } from "@/lib/domain/password-rule";
import { AppError } from "@/lib/errors";
import { hashPassword } from "./password";

/**
 * The hash of a new password. Call it before the transaction: hashing must not hold locks.
 * @throws AppError `password.not_accepted` {errors} in words for the field
 */
export async function hashNewPassword(newPassword: string, email: string): Promise<string> {
  const message = findPasswordFault(newPassword, email);
  if (message !== undefined) {
    throw new AppError("password.not_accepted", {
      errors: [{ path: "/newPassword", code: "password.not_accepted", message }],
      message,
    });
  }
  return hashPassword(newPassword);
}
