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
import { formatNumberOf } from "@/lib/domain/format/figure";
import { formatQuantity } from "@/lib/domain/format/quantity";
import { formatDateTime } from "@/lib/domain/format/time";
import { bodyOf, type DeriveOptions, type LikeDerivation, type OfferedRun, startingOptions } from "./derive-options";
import { Exclusions } from "./exclusions";
import { PreviewResult } from "./preview-result";
import { usePreview } from "./use-preview";

export interface DeriveFormProps {
  lot: string;
  /** Runs that count, newest first. */
  runs: readonly OfferedRun[];
  /** A derivation whose options are carried over. */
  like?: LikeDerivation;
  /** Serials to leave out besides, reasons to be given. */
  exclude: readonly string[];
}

/** Method, order, runs and exclusions of a new derivation; a preview first, if wanted. */
export function DeriveForm({ lot, runs, like, exclude }: DeriveFormProps) {
  const router = useRouter();
  const [options, setOptions] = useState<DeriveOptions>(() => startingOptions(runs, like, exclude));
  const [pending, setPending] = useState(false);
  const [problem, setProblem] = useState<ProblemDetails>();
  const preview = usePreview(lot, like);
  const change = (part: Partial<DeriveOptions>) => {
    setOptions({ ...options, ...part });
    preview.clear();
  };
  const derive = async () => {
    setPending(true);
    setProblem(undefined);
    try {
      const path = `/api/v1/lots/${encodeURIComponent(lot)}/derivations`;
      const { id } = await callApi<{ id: string }>(path, { method: "POST", json: bodyOf(options) });
      router.push(`/derivations/${id}`);
    } catch (error) {
      setProblem(problemOf(error));
    }
    setPending(false);
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
  const none = options.runs.size === 0;
  return (
    <Card title="Derive coefficients" note="The same runs and options always give the same numbers">
      <form
        id="derive"
        className="flex scroll-mt-4 flex-col gap-4"
        onSubmit={(event) => {
          event.preventDefault();
          void derive();
        }}
      >
        {like ? <CarriedOver like={like} kept={options.runs} /> : null}
        <MethodFields options={options} onChange={change} />
        <RunChoice runs={runs} chosen={options.runs} onChange={(chosen) => change({ runs: chosen })} />
        <Exclusions exclusions={options.exclusions} onChange={(exclusions) => change({ exclusions })} />
        <FormError problem={problem ?? preview.problem} />
        <div className="flex flex-wrap gap-2.5">
          <Button
            look="outline"
            disabled={none}
            pending={preview.pending}
            pendingText="Computing"
            onClick={(event) => event.currentTarget.form?.reportValidity() && void preview.show(options)}
          >
            Preview
          </Button>
          <Button type="submit" look="primary" disabled={none} pending={pending} pendingText="Starting">
            {preview.previewed ? "Derive with these options" : "Derive and propose"}
          </Button>
        </div>
      </form>
      <div role="status">{preview.previewed ? <PreviewResult {...preview.previewed} /> : null}</div>
    </Card>
  );
}

function CarriedOver({ like, kept }: { like: LikeDerivation; kept: ReadonlySet<string> }) {
  const gone = like.runs.filter((id) => !kept.has(id)).length;
  return (
    <p className="text-sm text-ink-soft">
      Runs, options and exclusions are those of the{" "}
      <Link href={`/derivations/${like.id}`}>{`${like.title.slice(0, 1).toLowerCase()}${like.title.slice(1)}`}</Link>; a
      preview is held against it.
      {gone > 0 ? ` ${formatNumberOf(gone, "of its runs is", "of its runs are")} not chosen.` : ""}
    </p>
  );
}

interface PartProps {
  options: DeriveOptions;
  onChange: (part: Partial<DeriveOptions>) => void;
}

function MethodFields({ options, onChange }: PartProps) {
  return (
    <div className="grid gap-4 md:grid-cols-2">
      <Select
        label="Gain"
        value={options.method}
        onChange={(event) => onChange({ method: event.currentTarget.value })}
        options={[
          { value: "pooled-gain", name: "Pooled: its temperature coefficient from the lot's sample" },
          { value: "individual", name: "Individual: from each device's own loaded readings" },
        ]}
        help="Zero is always trimmed device by device."
      />
      <Select
        label="Order"
        value={options.order}
        onChange={(event) => onChange({ order: event.currentTarget.value })}
        options={[
          { value: "1", name: "1, a straight line: 2 temperatures or more" },
          { value: "2", name: "2, a parabola: 3 temperatures or more" },
        ]}
        help="Two temperatures for order 1, or three for order 2, leave no degree of freedom: the fit can't show its own error."
      />
    </div>
  );
}

interface RunChoiceProps {
  runs: readonly OfferedRun[];
  chosen: ReadonlySet<string>;
  onChange: (chosen: ReadonlySet<string>) => void;
}

function RunChoice({ runs, chosen, onChange }: RunChoiceProps) {
  const toggled = (id: string, on: boolean) => {
    const next = new Set(chosen);
    if (on) next.add(id);
    else next.delete(id);
    onChange(next);
  };
  return (
    <fieldset className="m-0 min-w-0">
      <legend className="mb-1 text-sm font-semibold">Runs</legend>
      <div className="flex flex-col gap-1.5">
        {runs.map((run) => (
          <Checkbox
            key={run.id}
            checked={chosen.has(run.id)}
            onChange={(event) => toggled(run.id, event.currentTarget.checked)}
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
  );
}
