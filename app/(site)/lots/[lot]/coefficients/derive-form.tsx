"use client";

import Link from "next/link";
import { useRouter } from "next/navigation";
import { useState } from "react";
import { callApi, type ProblemDetails, problemOf } from "@/app/_components/api-client";
import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { Checkbox } from "@/app/_components/form/checkbox";
import { FormError } from "@/app/_components/form/form-error";
import { Select } from "@/app/_components/form/select";
import { TextInput } from "@/app/_components/form/text-input";
import { formatNumberOf } from "@/lib/domain/format/figure";
import { formatQuantity } from "@/lib/domain/format/quantity";
import { formatDateTime } from "@/lib/domain/format/time";
import type { DerivationPreview } from "@/schemas/api/derivations";
import { PreviewResult } from "./preview-result";

export interface DeriveFormProps {
  lot: string;
  /** Runs that count, newest first. */
  runs: readonly {
    id: string;
    purpose: string;
    createdAt: string;
    devices: number;
    temperatureLowC: number | null;
    temperatureHighC: number | null;
  }[];
}

interface Exclusion {
  key: number;
  serial: string;
  reason: string;
}

/** Method, order, runs and exclusions of a new derivation; a preview first, if wanted. */
export function DeriveForm({ lot, runs }: DeriveFormProps) {
  const router = useRouter();
  const [method, setMethod] = useState("pooled-gain");
  const [order, setOrder] = useState("1");
  const [chosen, setChosen] = useState<ReadonlySet<string>>(() => newestOfEachPurpose(runs));
  const [exclusions, setExclusions] = useState<readonly Exclusion[]>([]);
  const [pending, setPending] = useState<"preview" | "derive">();
  const [problem, setProblem] = useState<ProblemDetails>();
  const [preview, setPreview] = useState<DerivationPreview>();

  const path = `/api/v1/lots/${encodeURIComponent(lot)}/derivations`;
  const call = async (what: "preview" | "derive") => {
    const exclude = exclusions.map(({ serial, reason }) => ({ serial, reason }));
    const json = { method, order: Number(order), runs: [...chosen], exclude };
    setPending(what);
    setProblem(undefined);
    try {
      if (what === "preview")
        setPreview(await callApi<DerivationPreview>(`${path}?preview=true`, { method: "POST", json }));
      else router.push(`/derivations/${(await callApi<{ id: string }>(path, { method: "POST", json })).id}`);
    } catch (error) {
      setPreview(undefined);
      setProblem(problemOf(error));
    }
    setPending(undefined);
  };
  const change = (act: () => void) => {
    act();
    setPreview(undefined);
  };

  if (runs.length === 0) {
    return (
      <Card title="Derive coefficients">
        <p className="text-sm text-ink-soft">
          There are no readings to derive from. <Link href={`/lots/${lot}/readings`}>Upload a run</Link> first.
        </p>
      </Card>
    );
  }
  return (
    <Card title="Derive coefficients" note="The same runs and options always give the same numbers">
      <form
        className="flex flex-col gap-4"
        onSubmit={(event) => {
          event.preventDefault();
          void call("derive");
        }}
      >
        <div className="grid gap-4 md:grid-cols-2">
          <Select
            label="Gain"
            value={method}
            onChange={(event) => change(() => setMethod(event.currentTarget.value))}
            options={[
              { value: "pooled-gain", name: "Pooled: its temperature coefficient from the lot's sample" },
              { value: "individual", name: "Individual: from each device's own loaded readings" },
            ]}
            help="Zero is always trimmed device by device."
          />
          <Select
            label="Order"
            value={order}
            onChange={(event) => change(() => setOrder(event.currentTarget.value))}
            options={[
              { value: "1", name: "1, a straight line: 2 temperatures or more" },
              { value: "2", name: "2, a parabola: 3 temperatures or more" },
            ]}
            help="Two temperatures for order 1, or three for order 2, leave no degree of freedom: the fit can't show its own error."
          />
        </div>
        <fieldset className="m-0 min-w-0">
          <legend className="mb-1 text-sm font-semibold">Runs</legend>
          <div className="flex flex-col gap-1.5">
            {runs.map((run) => (
              <Checkbox
                key={run.id}
                checked={chosen.has(run.id)}
                onChange={(event) => change(() => setChosen(toggled(chosen, run.id, event.currentTarget.checked)))}
                label={
                  <>
                    {run.purpose}, {formatNumberOf(run.devices, "device")},{" "}
                    {formatQuantity("temperature", run.temperatureLowC)} to{" "}
                    {formatQuantity("temperature", run.temperatureHighC)} °C{" "}
                    <Link href={`/runs/${run.id}`} className="text-sm">
                      {formatDateTime(run.createdAt)}
                    </Link>
                  </>
                }
              />
            ))}
          </div>
        </fieldset>
        <Exclusions exclusions={exclusions} onChange={(next) => change(() => setExclusions(next))} />
        <FormError problem={problem} />
        <div className="flex flex-wrap gap-2.5">
          <Button
            look="outline"
            disabled={chosen.size === 0}
            pending={pending === "preview"}
            pendingText="Computing"
            onClick={() => void call("preview")}
          >
            Preview
          </Button>
          <Button
            type="submit"
            look="primary"
            disabled={chosen.size === 0}
            pending={pending === "derive"}
            pendingText="Starting"
          >
            Derive and propose
          </Button>
        </div>
      </form>
      <div role="status">{preview ? <PreviewResult preview={preview} /> : null}</div>
    </Card>
  );
}

/** The newest run of each purpose: what is most often derived from. */
function newestOfEachPurpose(runs: DeriveFormProps["runs"]): Set<string> {
  const ids = new Map<string, string>();
  for (const { id, purpose } of runs) if (!ids.has(purpose)) ids.set(purpose, id);
  return new Set(ids.values());
}

function toggled(set: ReadonlySet<string>, id: string, on: boolean): Set<string> {
  const next = new Set(set);
  if (on) next.add(id);
  else next.delete(id);
  return next;
}

function Exclusions({
  exclusions,
  onChange,
}: {
  exclusions: readonly Exclusion[];
  onChange: (next: Exclusion[]) => void;
}) {
  const put = (index: number, part: Partial<Exclusion>) =>
    onChange(exclusions.map((one, at) => (at === index ? { ...one, ...part } : one)));
  return (
    <fieldset className="m-0 min-w-0">
      <legend className="mb-1 text-sm font-semibold">Devices left out</legend>
      <p className="mb-2 text-xs text-ink-soft">
        An excluded device gets no coefficients; it stays visible with the reason, and who excludes can't approve.
      </p>
      <div className="flex flex-col gap-2.5">
        {exclusions.map((one, index) => (
          <div key={one.key} className="grid items-end gap-2.5 sm:grid-cols-[14rem_1fr_auto]">
            <TextInput
              label="Serial"
              code
              required
              value={one.serial}
              onChange={(event) => put(index, { serial: event.currentTarget.value })}
            />
            <TextInput
              label="Reason"
              required
              maxLength={2000}
              value={one.reason}
              onChange={(event) => put(index, { reason: event.currentTarget.value })}
            />
            <Button onClick={() => onChange(exclusions.filter((other) => other !== one))}>Keep it in</Button>
          </div>
        ))}
        <div>
          <Button onClick={() => onChange([...exclusions, { key: Date.now(), serial: "", reason: "" }])}>
            Exclude a device
          </Button>
        </div>
      </div>
    </fieldset>
  );
}
