import { AppError } from "@/lib/errors";

/** Ends a step of verifying with what is wrong. @throws AppError `bundle.not_verified` */
export function refuse(message: string): never {
  throw new AppError("bundle.not_verified", { message });
}
