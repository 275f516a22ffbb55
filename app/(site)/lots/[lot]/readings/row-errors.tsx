import type { ProblemDetails } from "@/app/_components/api-client";
import { FormError } from "@/app/_components/form/form-error";
import { Notice } from "@/app/_components/notice";
import { ScrollRegion } from "@/app/_components/scroll-region";
import { formatCount } from "@/lib/domain/format/figure";

export interface ShownRowError {
  row: number;
  column: string;
  code: string;
  message: string;
}

/** The errors of rows that a refused upload names; empty where it was refused for something else. */
export function rowErrorsOf(problem: ProblemDetails): ShownRowError[] {
  const errors: unknown = problem.errors;
  if (!Array.isArray(errors)) return [];
  return errors.filter((error): error is ShownRowError => typeof error?.row === "number");
}

/** What was wrong with a file, row by row; row is the line of the file, the header being 1. */
export function RowErrors({ problem, errors }: { problem: ProblemDetails; errors: readonly ShownRowError[] }) {
  if (errors.length === 0) return <FormError problem={problem} />;
  const total = (problem as ProblemDetails & { errorCount?: number }).errorCount ?? errors.length;
  return (
    <Notice tone="bad" title={problem.detail ?? problem.title}>
      {total > errors.length ? (
        <p>
          The first {formatCount(errors.length)} of {formatCount(total)}:
        </p>
      ) : null}
      <ScrollRegion label="Errors by row" className="mt-2 max-h-80 overflow-auto border border-rule">
        <table className="w-full">
          <thead>
            <tr>
              {["Row", "Column", "What is wrong"].map((name) => (
                <th
                  key={name}
                  scope="col"
                  className="sticky top-0 border-b border-rule bg-raised px-3 py-1.5 text-left text-xs text-ink-soft"
                >
                  {name}
                </th>
              ))}
            </tr>
          </thead>
          <tbody>
            {errors.map((error, index) => (
              // biome-ignore lint/suspicious/noArrayIndexKey: the list never changes
              <tr key={index} className="border-b border-rule/55">
                <td className="px-3 py-1 text-right font-mono">{error.row}</td>
                <td className="px-3 py-1 font-mono">{error.column || "—"}</td>
                <td className="px-3 py-1">{error.message}</td>
              </tr>
            ))}
          </tbody>
        </table>
      </ScrollRegion>
    </Notice>
  );
}
