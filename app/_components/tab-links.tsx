import Link from "next/link";
import type { ReactNode } from "react";

export interface TabLink {
  href: string;
  name: string;
  /** Beside the name, as a count or a mark. */
  note?: ReactNode;
}

/** Parts of one object, each a page of its own address. */
export function TabLinks({ label, links, current }: { label: string; links: readonly TabLink[]; current: string }) {
  return (
    <nav aria-label={label} className="mb-[18px] overflow-x-auto border-b border-rule print:hidden">
      <ul className="flex min-w-max gap-x-5">
        {links.map(({ href, name, note }) => (
          <li key={href}>
            <Link
              href={href}
              aria-current={href === current ? "page" : undefined}
              className={`flex items-center gap-1.5 border-b-2 py-2 text-sm no-underline ${
                href === current
                  ? "border-copper font-semibold text-ink"
                  : "border-transparent text-ink-soft hover:text-copper-strong"
              }`}
            >
              {name}
              {note}
            </Link>
          </li>
        ))}
      </ul>
    </nav>
  );
}
