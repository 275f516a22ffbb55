"use client";

import { useState } from "react";
import { callApi, type ProblemDetails, problemOf } from "@/app/_components/api-client";
import { Button } from "@/app/_components/button";
import { Digest } from "@/app/_components/digest";
import { FormError } from "@/app/_components/form/form-error";
import { Notice } from "@/app/_components/notice";
import { formatNumberOf } from "@/lib/domain/format/figure";
import type { LedgerVerdict } from "@/schemas/api/ledger";

/** Lets the server walk the whole chain and says what came out. */
export function VerifyLedger() {
  const [verdict, setVerdict] = useState<{ value: LedgerVerdict; seconds: number }>();
  const [problem, setProblem] = useState<ProblemDetails | null>(null);
  const [pending, setPending] = useState(false);

  const verify = async () => {
    setPending(true);
    setProblem(null);
    setVerdict(undefined);
    const start = performance.now();
    try {
      const value = await callApi<LedgerVerdict>("/api/v1/ledger/verify");
      setVerdict({ value, seconds: (performance.now() - start) / 1_000 });
    } catch (error) {
      setProblem(problemOf(error));
    } finally {
      setPending(false);
    }
  };

  return (
    <div className="flex flex-col gap-3">
      <div>
        <Button look="primary" onClick={verify} pending={pending} pendingText="Walking the chain">
          Verify the chain
        </Button>
      </div>
      <div aria-live="polite">
        <FormError problem={problem} />
        {verdict ? <Outcome {...verdict} /> : null}
      </div>
    </div>
  );
}

function Outcome({ value, seconds }: { value: LedgerVerdict; seconds: number }) {
  if (!value.ok)
    return (
      <Notice tone="bad" title={`Broken at event ${value.brokenAt}`}>
        <p>{value.message}</p>
        <p className="mt-1">
          Stop releasing. Keep this database and its backups as they are, compare with an earlier export, and tell
          whoever answers for the records.
        </p>
      </Notice>
    );
  return (
    <Notice tone="good" title={`${formatNumberOf(value.events, "event")} checked, all hold`}>
      <p>
        Every hash was computed again and every event continues the one before it, in {seconds.toFixed(1)} s. The head:
      </p>
      <p className="mt-1">
        <Digest value={value.head} name="verified head" />
      </p>
    </Notice>
  );
}
