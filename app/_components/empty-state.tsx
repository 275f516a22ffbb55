import type { ReactNode } from "react";

const foil = `M6 30V11${[0, 1, 2, 3, 4].map(() => "a6 6 0 0 1 12 0v10a6 6 0 0 0 12 0V11").join("")}a6 6 0 0 1 12 0v19`;

export interface EmptyStateProps {
  title: string;
  /** What to do next, or why there is nothing. */
  children?: ReactNode;
  action?: ReactNode;
}

/** Says that nothing is here yet and what to do next, under a few lines of the foil. Belongs on a raised sheet. */
export function EmptyState({ title, children, action }: EmptyStateProps) {
  return (
    <div className="flex flex-col items-center gap-2 px-4 py-10 text-center">
      <svg width="144" height="32" viewBox="0 0 144 32" fill="none" aria-hidden="true">
        {/* One path three times gives three parallel lines. */}
        <path d={foil} strokeWidth="7" className="stroke-copper" />
        <path d={foil} strokeWidth="5" className="stroke-raised" />
        <path d={foil} strokeWidth="1" className="stroke-copper" />
      </svg>
      <p className="font-semibold">{title}</p>
      {children ? <div className="max-w-[56ch] text-sm text-ink-soft">{children}</div> : null}
      {action ? <div className="mt-2">{action}</div> : null}
    </div>
  );
}
