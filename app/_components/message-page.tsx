import type { ReactNode } from "react";
import { MakerMark } from "@/app/_components/frame/maker-mark";

/** A page that says one thing, for errors and unknown addresses. */
export function MessagePage({ title, children }: { title: string; children: ReactNode }) {
  return (
    <main className="mx-auto flex max-w-[560px] flex-col gap-3 px-4 py-16">
      <MakerMark size={36} />
      <h1 className="text-lg">{title}</h1>
      {children}
    </main>
  );
}
