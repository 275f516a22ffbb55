"use client";

import { useRouter } from "next/navigation";
import { useState } from "react";
import { callApi, type ProblemDetails, problemOf } from "@/app/_components/api-client";
import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { FileDrop } from "@/app/_components/file-drop";
import { NumberInput } from "@/app/_components/form/number-input";
import { RowErrors, rowErrorsOf } from "../readings/row-errors";

export interface ImportPanelProps {
  lot: string;
  /** The family's: what imported values have to rest on. */
  referenceC: number;
  capacityKg: number;
}

/** Takes coefficients that were found elsewhere; a second person decides on them as on derived ones. */
export function ImportPanel({ lot, referenceC, capacityKg }: ImportPanelProps) {
  const router = useRouter();
  const [file, setFile] = useState<File>();
  const [pending, setPending] = useState(false);
  const [problem, setProblem] = useState<ProblemDetails>();

  const send = async (form: FormData) => {
    if (!file) return;
    const query = new URLSearchParams({
      referenceC: String(form.get("referenceC")),
      capacityKg: String(form.get("capacityKg")),
    });
    setPending(true);
    setProblem(undefined);
    try {
      const path = `/api/v1/lots/${encodeURIComponent(lot)}/coefficients?${query}`;
      const body = file.slice(0, file.size, "text/csv");
      const { id } = await callApi<{ id: string }>(path, { method: "POST", body, contentType: "text/csv" });
      router.push(`/derivations/${id}`);
    } catch (error) {
      setProblem(problemOf(error));
    }
    setPending(false);
  };

  return (
    <Card title="Import coefficients" note="Found elsewhere, one row a device">
      <form
        className="flex flex-col gap-4"
        onSubmit={(event) => {
          event.preventDefault();
          void send(new FormData(event.currentTarget));
        }}
      >
        <FileDrop
          label="Choose the coefficients"
          accept=".csv"
          onFile={setFile}
          help="Columns serial, tempOffset, tempSlope, zero, zeroTc, gain, gainTc, for order 2 also zeroTc2 and gainTc2; in °C, mV/V, mV/V/K and 1/K."
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
        <div>
          <Button type="submit" look="outline" disabled={!file} pending={pending} pendingText="Importing">
            Import and propose
          </Button>
        </div>
      </form>
    </Card>
  );
}
