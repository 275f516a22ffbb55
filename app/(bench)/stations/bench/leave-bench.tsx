"use client";

import Link from "next/link";
import { useState } from "react";
import { signOut } from "@/app/_components/auth-client";

const look = "rounded border border-rule px-4 py-2 text-ink-soft no-underline hover:border-copper hover:text-ink";

/** The way out of the full screen: signing out for operators, the rest of the product for others. */
export function LeaveBench({ person, onlyOperator }: { person: string; onlyOperator: boolean }) {
  const [failed, setFailed] = useState(false);
  const leave = () =>
    signOut().then(
      () => window.location.assign("/sign-in?out=1"),
      () => setFailed(true),
    );
  return onlyOperator ? (
    <span className="flex flex-wrap items-center gap-2">
      <Link href="/trace" className={look}>
        Look up a serial
      </Link>
      <button type="button" className={look} onClick={() => void leave()}>
        {failed ? "Still signed in: try again" : `Sign out ${person}`}
      </button>
    </span>
  ) : (
    <Link href="/stations" className={look}>
      Leave the bench
    </Link>
  );
}
