"use client";

import { Button } from "@/app/_components/button";
import { MessagePage } from "@/app/_components/message-page";

/** Shown when a page fails through a fault of ours. The number leads to the entry in the log. */
export default function ErrorPage({ error, reset }: { error: Error & { digest?: string }; reset: () => void }) {
  return (
    <MessagePage title="Something went wrong here">
      <p className="text-ink-soft">
        The fault is ours and has been logged. Nothing that you had confirmed is lost. Try again; if it stays, tell the
        person who runs this server the number below.
      </p>
      {error.digest ? <p className="font-mono text-sm">{error.digest}</p> : null}
      <p>
        <Button look="primary" onClick={reset}>
          Try again
        </Button>
      </p>
    </MessagePage>
  );
}
