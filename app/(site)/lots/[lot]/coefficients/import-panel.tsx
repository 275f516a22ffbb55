"use client";

import { useRouter } from "next/navigation";
import { useState } from "react";
import { callApi, type ProblemDetails, problemOf } from "@/app/_components/api-client";
import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { FileDrop } from "@/app/_components/file-drop";
import { NumberInput } from "@/app/_components/form/number-input";
import { formatNumberOf } from "@/lib/domain/format/figure";
import type { ImportPreview as Preview } from "@/schemas/api/coefficients";
import { RowErrors, rowErrorsOf } from "../readings/row-errors";
import { ImportPreview } from "./import-preview";

export interface ImportPanelProps {
  lot: string;
  /** The family's: what imported values have to rest on. */
  referenceC: number;
  capacityKg: number;
}

/** Takes coefficients that were found elsewhere, after a look at them; a second person decides on them as on derived ones. */
export function ImportPanel({ lot, referenceC, capacityKg }: ImportPanelProps) {
  const router = useRouter();
  const [file, setFile] = useState<File>();
  const [pending, setPending] = useState<"preview" | "import">();
  const [problem, setProblem] = useState<ProblemDetails>();
  const [preview, setPreview] = useState<Preview>();

  const call = async (what: "preview" | "import", form: HTMLFormElement) => {
    if (!file || !form.reportValidity()) return;
    const query = importQueryOf(new FormData(form), what === "preview");
    const path = `/api/v1/lots/${encodeURIComponent(lot)}/coefficients?${query}`;
    const body = { method: "POST" as const, body: file.slice(0, file.size, "text/csv"), contentType: "text/csv" };
    setPending(what);
    setProblem(undefined);
    try {
      if (what === "preview") setPreview(await callApi<Preview>(path, body));
      else router.push(`/derivations/${(await callApi<{ id: string }>(path, body)).id}`);
    } catch (error) {
      setProblem(problemOf(error));
    }
    setPending(undefined);
  };
  const choose = (next: File) => {
    setFile(next);
    setPreview(undefined);
    setProblem(undefined);
  };
  const isReady = preview !== undefined && preview.errorCount === 0;

  return (
    <Card title="Import coefficients" note="Found elsewhere, one row a device">
      <form
        className="flex flex-col gap-4"
        onSubmit={(event) => {
          event.preventDefault();
          void call(isReady ? "import" : "preview", event.currentTarget);
        }}
      >
        <FileDrop
          label="Choose the coefficients"
          accept=".csv"
          onFile={choose}
          help="Columns serial, tempOffset, tempSlope, zero, zeroTc, gain, gainTc, for order 2 also zeroTc2 and gainTc2; in °C, mV/V, mV/V/K and 1/K. gainTc is the correction, zeroTc the drift."
        />
        <div className="grid gap-4 sm:grid-cols-2">
          <NumberInput
            label="Reference temperature they rest on"
            name="referenceC"
            unit="°C"
            required
            help={`The family's is ${referenceC} °C.`}
          />
          <NumberInput
            label="Capacity they rest on"
            name="capacityKg"
            unit="kg"
            required
            help={`The family's is ${capacityKg} kg.`}
          />
        </div>
        <div role="alert">{problem ? <RowErrors problem={problem} errors={rowErrorsOf(problem)} /> : null}</div>
        {preview ? <ImportPreview preview={preview} /> : null}
        <div className="flex flex-wrap gap-2.5">
          {isReady ? (
            <Button type="submit" look="primary" pending={pending === "import"} pendingText="Importing">
              Import and propose {formatNumberOf(preview.devices, "device")}
            </Button>
          ) : (
            <Button type="submit" look="outline" disabled={!file} pending={pending === "preview"} pendingText="Reading">
              Look at the file
            </Button>
          )}
        </div>
      </form>
    </Card>
  );
}

function importQueryOf(form: FormData, isPreview: boolean): URLSearchParams {
  return new URLSearchParams({
    referenceC: String(form.get("referenceC")),
    capacityKg: String(form.get("capacityKg")),
    ...(isPreview && { preview: "true" }),
  });
}
