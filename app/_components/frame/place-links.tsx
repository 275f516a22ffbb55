"use client";

import Link from "next/link";
import { usePathname } from "next/navigation";
import { isInPlace, placesOf } from "@/app/_components/frame/places";

/** The places as a row, for screens wide enough. */
export function PlaceLinks({ roles }: { roles: readonly string[] }) {
  const path = usePathname();
  return (
    <nav aria-label="Places" className="hidden h-full gap-[22px] md:flex">
      {placesOf(roles).map((place) => {
        const here = isInPlace(place, path);
        return (
          <Link
            key={place.href}
            href={place.href}
            aria-current={here ? "page" : undefined}
            className={`flex items-center border-b-2 pt-0.5 no-underline ${
              here ? "border-copper font-semibold text-ink" : "border-transparent text-ink-soft hover:text-ink"
            }`}
          >
            {place.name}
          </Link>
        );
      })}
    </nav>
  );
}
