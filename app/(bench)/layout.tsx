import type { ReactNode } from "react";

/** Full screen, no header and no navigation: one task, large type. */
export default function BenchLayout({ children }: { children: ReactNode }) {
  return <div className="flex min-h-dvh flex-col text-[22px] leading-[1.35]">{children}</div>;
}
