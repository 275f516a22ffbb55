"use client";

import { Button } from "@/app/_components/button";
import { Notice } from "@/app/_components/notice";

/** Where rows should be: why they are not, and another try. */
export function RowsFailed({ error, onRetry }: { error: Error; onRetry: () => void }) {
  return (
    <div className="mb-2">
      <Notice tone="bad" title="The rows could not be loaded">
        {error.message} <Button onClick={onRetry}>Try again</Button>
      </Notice>
    </div>
  );
}
