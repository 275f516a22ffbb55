import type { ReactNode } from "react";

/** A stretch that scrolls by itself; reached by Tab, so that arrow keys can move it. */
export function ScrollRegion({
  label,
  className,
  children,
}: {
  label: string;
  className: string;
  children: ReactNode;
}) {
  return (
    // biome-ignore lint/a11y/noNoninteractiveTabindex: a region that scrolls has to be reached by keyboard
    <section tabIndex={0} aria-label={label} className={className}>
      {children}
    </section>
  );
}
