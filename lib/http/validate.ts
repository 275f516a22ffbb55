import type { z } from "zod";
import { AppError, type Problem } from "@/lib/errors";

/** Zod's findings as problems with JSON pointers, for machines and for the field they belong to. */
export function problemsOf(error: z.ZodError, root = ""): Problem[] {
  return error.issues.map((issue) => ({
    path: `${root}/${issue.path.map(String).join("/")}`.replace(/\/$/, ""),
    code: issue.code,
    message: issue.message,
  }));
}

/** The value as the schema gives it. @throws AppError `request.invalid` {errors} naming every field at once */
export function validate<T>(schema: z.ZodType<T>, value: unknown, root = ""): T {
  const result = schema.safeParse(value);
  if (result.success) return result.data;
  const errors = problemsOf(result.error, root);
  const first = errors[0];
  throw new AppError("request.invalid", {
    errors,
    message: first ? `${first.path || "body"}: ${first.message}` : "Not valid.",
  });
}
