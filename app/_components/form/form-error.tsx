import type { ProblemDetails } from "@/app/_components/api-client";
import { Notice } from "@/app/_components/notice";

/** Codes that a field shows by itself. */
const shownByField = new Set(["auth.password_wrong", "auth.code_wrong"]);

/** A refusal in words over the form's button, with everything that is wrong listed. Nothing typed is lost. */
export function FormError({ problem }: { problem: ProblemDetails | null | undefined }) {
  if (!problem || shownByField.has(problem.code)) return null;
  return (
    <div role="alert">
      <Notice tone="bad" title={problem.title}>
        {problem.detail && problem.detail !== problem.title ? <p>{problem.detail}</p> : null}
        {problem.errors?.length ? (
          <ul className="mt-1 list-disc pl-5">
            {problem.errors.map((error) => (
              <li key={`${error.path}${error.message}`}>
                {error.path ? <span className="font-mono">{error.path.replace(/^\//, "")}: </span> : null}
                {error.message}
              </li>
            ))}
          </ul>
        ) : null}
        <p className="mt-1 font-mono text-xs text-ink-soft">{problem.code}</p>
      </Notice>
    </div>
  );
}
