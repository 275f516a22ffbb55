"use client";

import { useRouter } from "next/navigation";
import { useEffect, useState } from "react";
import { callApi, type ProblemDetails, problemOf } from "@/app/_components/api-client";
import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { FileDrop } from "@/app/_components/file-drop";
import { Notice } from "@/app/_components/notice";
import { useToast } from "@/app/_components/toast";
import type { FamilyRules } from "@/lib/domain/compensation/types";
import type { GivenRow } from "@/lib/domain/readings/given-table";
import type { ReadingMapping } from "@/lib/domain/readings/map-table";
import type { ChosenEquipment } from "./equipment-choice";
import { RowErrors, rowErrorsOf } from "./row-errors";
import { FilePart } from "./upload/file-part";
import type { PlacedError } from "./upload/preview-row";
import { RunFields } from "./upload/run-fields";
import { Stored } from "./upload/stored";
import { UploadSteps } from "./upload/upload-steps";
import { useMapping } from "./upload/use-mapping";
import { useReadingsFile } from "./upload/use-readings-file";
import { type RunChoices, useRunChoice } from "./upload/use-run-choice";
import { useUpload } from "./upload/use-upload";

const MAX_BYTES = 64 * 1024 * 1024;
const ERRORS_SHOWN = 50;

export interface UploadPanelProps extends RunChoices {
  lot: string;
  family: string;
  rules: FamilyRules;
  /** How the family's tables were read last. */
  kept: ReadingMapping | null;
  equipment: readonly ChosenEquipment[];
}

interface Marked {
  errors: PlacedError[];
  total: number;
  rows: GivenRow[];
}

/**
 * Takes the readings of a run: the file with its columns, purpose, equipment, and what the run replaces. All of it is checked in
 * the browser first; nothing is sent or stored unless all of it can be taken.
 */
export function UploadPanel({ lot, family, rules, kept, equipment, ...choices }: UploadPanelProps) {
  const router = useRouter();
  const say = useToast();
  const choice = useRunChoice(choices);
  const readings = useReadingsFile();
  const { facts, checked, check, uncheck } = readings;
  const mapping = useMapping(facts, kept);
  const upload = useUpload();
  const [refused, setRefused] = useState<Marked>();
  const { purpose } = choice;
  const { map, decimalComma, offset, complete } = mapping;
  const days1904 = facts?.days1904 ?? false;

  useEffect(() => {
    setRefused(undefined);
    if (!facts || !complete || purpose === "") uncheck();
    else check({ map, options: { decimalComma, offset, days1904 }, purpose, rules });
  }, [facts, complete, purpose, map, decimalComma, offset, days1904, rules, check, uncheck]);

  const open = (file: File) => {
    upload.clear();
    readings.open(file, kept?.sheet ? { sheet: kept.sheet } : {});
  };
  /** A file that was sent as it stands teaches nothing about the family's other tables. */
  const keepMapping = async () => {
    if (!facts || !checked?.body) return;
    const json = mapping.toKeep(facts);
    try {
      await callApi(`/api/v1/families/${encodeURIComponent(family)}/reading-mapping`, {
        method: "PUT",
        json,
      });
    } catch (error) {
      const text = problemOf(error).detail ?? "It has to be chosen again next time.";
      say({ tone: "caution", title: "The columns could not be remembered", text });
    }
  };
  const markRefused = async (problem: ProblemDetails) => {
    const errors = rowErrorsOf(problem).slice(0, ERRORS_SHOWN);
    if (errors.length === 0) return;
    const total = (problem as { errorCount?: number }).errorCount ?? errors.length;
    const rows = await readings.findRows(errors.map((error) => error.row));
    const placed = errors.map((error) => ({ ...error, row: rows[error.row]?.line ?? error.row }));
    setRefused({ errors: placed, total, rows: Object.values(rows) });
  };
  const send = async () => {
    if (!readings.file || !checked || checked.errorCount > 0) return;
    const query = choice.query();
    query.set("fileName", readings.file.name);
    if (checked.sourceSha256) query.set("sourceSha256", checked.sourceSha256);
    const body = checked.body ?? readings.file.slice(0, readings.file.size, "text/csv");
    setRefused(undefined);
    const { done, problem } = await upload.send(`/api/v1/lots/${encodeURIComponent(lot)}/runs?${query}`, body);
    if (problem) await markRefused(problem);
    if (!done) return;
    readings.clear();
    await keepMapping();
    router.refresh();
  };

  const own: Marked | undefined = checked && {
    errors: checked.errors.slice(0, ERRORS_SHOWN),
    total: checked.errorCount,
    rows: checked.wrongRows,
  };
  const busy =
    readings.busy ??
    (upload.sending && {
      step: upload.sending.share < 1 ? ("sending" as const) : ("storing" as const),
      share: upload.sending.share < 1 ? upload.sending.share : undefined,
    });
  const stop = () => (upload.sending ? upload.stop() : readings.clear());
  return (
    <Card title="Upload readings" note="CSV or XLSX, any columns; at most 64 MiB and 600,000 rows">
      <form
        className="flex flex-col gap-4"
        onSubmit={(event) => {
          event.preventDefault();
          void send();
        }}
      >
        <FileDrop
          key={upload.done?.id ?? "first"}
          label="Choose the readings"
          accept=".csv,.txt,.tsv,.xlsx"
          maxBytes={MAX_BYTES}
          onFile={open}
          error={readings.fault}
          help="Columns serial, point, chamber_c (°C by the reference sensor, corrected), soak_min, device_temp, load_kg, signal_mv_v, taken_at; optional position, hardware_id, dwell_s, output_mv_v. Other names are mapped below."
        />
        {facts ? (
          <FilePart
            facts={facts}
            mapping={mapping}
            purposeChosen={purpose !== ""}
            checked={checked}
            marked={refused ?? own}
            disabled={upload.sending !== undefined}
            onReread={readings.reread}
          />
        ) : null}
        <fieldset disabled={upload.sending !== undefined} className="m-0 flex min-w-0 flex-col gap-4">
          <RunFields choice={choice} runs={choices.runs} plans={choices.plans} equipment={equipment} />
        </fieldset>
        <div role="alert">
          {upload.problem ? <Refusal problem={upload.problem} inPreview={refused !== undefined} /> : null}
        </div>
        {upload.done ? <Stored lot={lot} run={upload.done} /> : null}
        {busy ? <UploadSteps step={busy.step} share={busy.share} onStop={stop} /> : null}
        <div>
          <Button
            type="submit"
            look="primary"
            disabled={!checked || checked.errorCount > 0}
            pending={upload.sending !== undefined}
            pendingText="Uploading"
          >
            Upload the run
          </Button>
        </div>
      </form>
    </Card>
  );
}

function Refusal({ problem, inPreview }: { problem: ProblemDetails; inPreview: boolean }) {
  if (!inPreview) return <RowErrors problem={problem} errors={rowErrorsOf(problem)} />;
  return (
    <Notice tone="bad" title="The server refused the run; nothing was stored">
      {problem.detail} The rows are marked in the preview.
    </Notice>
  );
}
