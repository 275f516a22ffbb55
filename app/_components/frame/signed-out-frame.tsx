import type { ReactNode } from "react";
import { MakerMark } from "@/app/_components/frame/maker-mark";

/** A page for somebody who is not signed in: the mark and one narrow sheet, or a `wide` page with two. */
export function SignedOutFrame({ wide, children }: { wide?: boolean; children: ReactNode }) {
  return (
    <main className={`mx-auto flex flex-col gap-6 px-4 py-8 md:py-16 ${wide ? "max-w-[880px]" : "max-w-[480px]"}`}>
      <p className="flex items-center gap-2.5 text-lg font-bold tracking-[0.01em]">
        <MakerMark size={30} />
        Trimwright
      </p>
      {children}
    </main>
  );
}
