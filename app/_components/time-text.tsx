"use client";

import { useEffect, useState } from "react";
import { formatDate, formatDateTime } from "@/lib/domain/format/time";

/** A moment in UTC; the reader's own time on hover. `at` is RFC 3339. */
export function TimeText({ at, date = false }: { at: string; date?: boolean }) {
  const [local, setLocal] = useState<string>();
  useEffect(() => setLocal(new Date(at).toLocaleString(undefined, { dateStyle: "full", timeStyle: "long" })), [at]);
  return (
    <time dateTime={at} title={local} className="whitespace-nowrap">
      {date ? formatDate(at) : formatDateTime(at)}
    </time>
  );
}
