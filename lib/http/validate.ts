import type { z } from "zod";
import { AppError, type Problem } from "@/lib/errors";
import { giveWay } from "@/lib/services/in-slices";

/** Zod's findings as problems with JSON pointers, for machines and for the field they belong to. */
export function problemsOf(error: z.ZodError, root = ""): Problem[] {
  return error.issues.map((issue) => ({
    path: `${root}/${issue.path.map(String).join("/")}`.replace(/\/$/, ""),
    code: issue.code,
    message: issue.message,
  }));
}

const LONE_SURROGATE = /\p{Surrogate}/u;
/** Problems of this kind that are named at most. */
const SHOWN_MAX = 20;
/** Nothing that we take is nested deeper. */
const DEPTH_MAX = 64;

/**
 * Texts that neither the database nor canonical JSON can hold, though JSON can spell them: with NUL or half of a surrogate pair in
 * them. Also what is nested so deep that reading it on would exhaust the stack.
 */
function unstorableTexts(value: unknown, root: string): Problem[] {
  const problems: Problem[] = [];
  const look = (member: unknown, path: () => string, depth: number): void => {
    if (problems.length >= SHOWN_MAX) return;
    if (typeof member === "string") {
      if (member.includes("\0") || LONE_SURROGATE.test(member))
        problems.push({ path: path(), code: "not_storable", message: "Holds NUL or half of a character pair." });
    } else if (depth > DEPTH_MAX) {
      problems.push({ path: root, code: "too_deep", message: "Is nested too deep." });
    } else if (Array.isArray(member)) {
      member.forEach((item, i) => {
        look(item, () => `${path()}/${i}`, depth + 1);
      });
    } else if (typeof member === "object" && member !== null) {
      for (const [name, item] of Object.entries(member)) {
        look(name, path, depth);
        look(item, () => `${path()}/${name}`, depth + 1);
      }
    }
  };
  look(value, () => root, 0);
  return problems;
}

/** The value as the schema gives it. @throws AppError `request.invalid` {errors} naming every field at once */
export function validate<T>(schema: z.ZodType<T>, value: unknown, root = ""): T {
  assertStorable(value, root);
  return parseAs(schema, value, root);
}

/** {@link validate} for a large value, with a pause between its two parts. @throws AppError `request.invalid` {errors} */
export async function validateLarge<T>(schema: z.ZodType<T>, value: unknown): Promise<T> {
  assertStorable(value, "");
  await giveWay();
  return parseAs(schema, value, "");
}

function assertStorable(value: unknown, root: string): void {
  const unstorable = unstorableTexts(value, root);
  if (unstorable.length > 0) throw invalid(unstorable);
}

function parseAs<T>(schema: z.ZodType<T>, value: unknown, root: string): T {
  const result = schema.safeParse(value);
  if (result.success) return result.data;
  throw invalid(problemsOf(result.error, root));
}

function invalid(errors: readonly Problem[]): AppError {
  const first = errors[0];
  return new AppError("request.invalid", {
    errors,
    message: first ? `${first.path || "body"}: ${first.message}` : "Not valid.",
  });
}
