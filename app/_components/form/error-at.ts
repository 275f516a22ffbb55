import type { ProblemDetails } from "@/app/_components/api-client";

/** What a refusal says about one field; `path` as in the problem's errors, `/email`. */
export function errorAt(problem: ProblemDetails | null | undefined, path: string): string | undefined {
  return problem?.errors?.find((error) => error.path === path)?.message;
}
