import Link from "next/link";
import type { ReactNode } from "react";
import { Keys } from "@/app/_components/frame/keys";
import { MakerMark } from "@/app/_components/frame/maker-mark";
import { type FramePerson, PersonMenu } from "@/app/_components/frame/person-menu";
import { PlaceLinks } from "@/app/_components/frame/place-links";
import { SerialSearch } from "@/app/_components/frame/serial-search";

/** Header with mark, places, search and person; the page below it, which begins with a `TitleRow`. */
export function Frame({ person, children }: { person: FramePerson; children: ReactNode }) {
  return (
    <>
      <a
        href="#content"
        className="sr-only focus:not-sr-only focus:absolute focus:top-2 focus:left-2 focus:z-50 focus:rounded focus:bg-raised focus:px-3 focus:py-2"
      >
        Skip to the content
      </a>
      <header className="sticky top-0 z-30 border-b border-rule bg-raised print:hidden">
        <div className="mx-auto flex h-[52px] max-w-[2560px] items-center gap-3 px-4 md:gap-7 md:px-7">
          <Link
            href="/today"
            className="flex flex-none items-center gap-[9px] text-md font-bold tracking-[0.01em] text-ink no-underline hover:text-ink"
          >
            <MakerMark />
            Trimwright
          </Link>
          <PlaceLinks roles={person.roles} />
          <SerialSearch />
          <PersonMenu person={person} />
        </div>
      </header>
      <main id="content" className="mx-auto max-w-[1500px] px-4 pt-3.5 pb-9 md:px-7 md:pt-5 print:max-w-none print:p-0">
        {children}
      </main>
      <Keys roles={person.roles} />
    </>
  );
}
