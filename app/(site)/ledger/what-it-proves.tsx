import { Card } from "@/app/_components/card";

/** What a hash chain shows and what it can't, in plain words. */
export function WhatItProves() {
  return (
    <Card title="What it proves, and what not">
      <div className="flex flex-col gap-2 text-sm text-ink-soft">
        <p>
          Each event holds the hash of the one before, so nobody can change, drop or slip in an event without every
          later hash being another. Signed releases name the head of their day, so a ledger cut short or written anew no
          longer fits them.
        </p>
        <p>
          It does not prove that what was entered was true, nor who sat at the keyboard: somebody who owns the database
          could write events under another person's id. Against that stand exports kept elsewhere: compare the head with
          one from another day.
        </p>
        <p>
          Names and reasons are kept beside the chain and can be erased; the chain holds only a salted hash of them.
          Look-ups, downloads and failed sign-ins are not in it.
        </p>
        <details>
          <summary className="w-max text-slate hover:text-copper-strong">Check an export by hand</summary>
          <p className="mt-1.5">
            A line is an event, exactly as it was hashed. The SHA-256 of a line, without its line end, is{" "}
            <code className="font-mono">previous</code> of the next:
          </p>
          <pre className="mt-1 overflow-x-auto rounded bg-sunk p-2 font-mono text-xs text-ink">
            head -n 1 ledger.ndjson | tr -d '\n' | sha256sum
          </pre>
        </details>
      </div>
    </Card>
  );
}
