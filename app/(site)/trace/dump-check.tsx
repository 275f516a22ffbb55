"use client";

import { useState } from "react";
import { callApi, type ProblemDetails, problemOf } from "@/app/_components/api-client";
import { dumpTypeOf } from "@/app/_components/dump-type";
import { FileDrop } from "@/app/_components/file-drop";
import { FormError } from "@/app/_components/form/form-error";
import { DUMP_MAX_BYTES, type DumpResult } from "@/schemas/api/devices";
import { DumpFindings } from "./dump-findings";

/** Takes a memory dump and says which image it is, or which bytes and parameters differ. */
export function DumpCheck({ serial }: { serial?: string }) {
  const [result, setResult] = useState<{ dump: DumpResult; at: number }>();
  const [problem, setProblem] = useState<ProblemDetails | null>(null);
  const [busy, setBusy] = useState(false);

  const check = async (file: File) => {
    setBusy(true);
    setProblem(null);
    setResult(undefined);
    try {
      const path = serial ? `/api/v1/devices/${encodeURIComponent(serial)}/dump` : "/api/v1/dumps";
      const dump = await callApi<DumpResult>(path, {
        method: "POST",
        body: file,
        contentType: await dumpTypeOf(file),
      });
      setResult({ dump, at: Date.now() });
    } catch (error) {
      setProblem(problemOf(error));
    } finally {
      setBusy(false);
    }
  };

  return (
    <div className="flex flex-col gap-3">
      <FileDrop
        label={busy ? "Checking" : "Choose a dump"}
        accept=".hex,.ihex,.s19,.srec,.bin,.raw,.eep"
        help="Intel HEX, S-records, or the raw bytes of the whole memory from its base address. Nothing is stored."
        maxBytes={DUMP_MAX_BYTES}
        onFile={(file) => void check(file)}
      />
      <div aria-live="polite" className="flex flex-col gap-3">
        <FormError problem={problem} />
        {result ? <DumpFindings key={result.at} result={result.dump} asked={serial} /> : null}
      </div>
    </div>
  );
}
