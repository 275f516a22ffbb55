"use client";

import Link from "next/link";
import { useRouter } from "next/navigation";
import { useState } from "react";
import { callApi, type ProblemDetails, problemOf } from "@/app/_components/api-client";
import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { FileDrop } from "@/app/_components/file-drop";
import { Checkbox } from "@/app/_components/form/checkbox";
import { Select } from "@/app/_components/form/select";
import { TextArea } from "@/app/_components/form/text-area";
import { Notice } from "@/app/_components/notice";
import { formatNumberOf } from "@/lib/domain/format/figure";
import { formatDateTime } from "@/lib/domain/format/time";
import type { FindingView } from "@/schemas/api/runs";
import { ColumnMapping } from "./column-mapping";
import { type ChosenEquipment, EquipmentChoice } from "./equipment-choice";
import { PURPOSES } from "./purposes";
import { type GivenTable, isReadingsCsv, readTable } from "./read-table";
import { RowErrors, rowErrorsOf } from "./row-errors";

const MAX_BYTES = 64 * 1024 * 1024;

export interface UploadPanelProps {
  lot: string;
  equipment: readonly ChosenEquipment[];
  /** Runs that count and so may be replaced. */
  runs: readonly { id: string; purpose: string; createdAt: string; devices: number; planId: string | null }[];
  /** Planned runs that wait for their readings. */
  plans: readonly { id: string; name: string; purpose: string; equipment: readonly string[] }[];
  /** What a link chose: the planned run, or the run to replace. */
  start?: { plan?: string; supersedes?: string };
}

interface Uploaded {
  id: string;
  rows: number;
  devices: number;
  added: number;
  staleSets: number;
  findings: FindingView[];
}

/** Takes the readings of a run: file, purpose, equipment, and what the run replaces. Nothing is stored unless all of it is taken. */
export function UploadPanel({ lot, equipment, runs, plans, start = {} }: UploadPanelProps) {
  const router = useRouter();
  const startPlan = plans.find((one) => one.id === start.plan);
  const startRun = runs.find((one) => one.id === start.supersedes);
  const [file, setFile] = useState<File>();
  const [table, setTable] = useState<GivenTable>();
  const [mapped, setMapped] = useState<string>();
  const [purpose, setPurpose] = useState(startPlan?.purpose ?? startRun?.purpose ?? "");
  const [plan, setPlan] = useState(startPlan?.id ?? "");
  const [used, setUsed] = useState<readonly string[]>(startPlan?.equipment ?? []);
  const [addDevices, setAddDevices] = useState(false);
  const [supersedes, setSupersedes] = useState(startRun?.id ?? "");
  const [reason, setReason] = useState("");
  const [pending, setPending] = useState(false);
  const [problem, setProblem] = useState<ProblemDetails>();
  const [done, setDone] = useState<Uploaded>();

  const choose = async (next: File) => {
    setFile(next);
    setDone(undefined);
    setProblem(undefined);
    setMapped(undefined);
    setTable(undefined);
    if (await isReadingsCsv(next)) return;
    try {
      setTable(await readTable(next));
    } catch (error) {
      const detail = error instanceof Error ? error.message : "The file can't be read as a table.";
      setProblem({ code: "file.unreadable", status: 0, title: "The file can't be read", detail });
    }
  };
  const changePurpose = (next: string) => {
    setPurpose(next);
    setSupersedes("");
    setPlan("");
  };
  const choosePlan = (id: string) => {
    const chosen = plans.find((one) => one.id === id);
    setPlan(id);
    if (!chosen) return;
    setPurpose(chosen.purpose);
    setUsed(chosen.equipment);
    setSupersedes("");
  };
  const send = async () => {
    if (!file) return;
    const query = new URLSearchParams({ purpose, addDevices: String(addDevices), fileName: file.name });
    if (used.length > 0) query.set("equipment", used.join(","));
    if (supersedes) {
      query.set("supersedes", supersedes);
      query.set("reason", reason);
    }
    // A corrected file stays the reading of what was planned.
    const planned = runs.find((run) => run.id === supersedes)?.planId ?? plan;
    if (planned) query.set("plan", planned);
    setPending(true);
    setProblem(undefined);
    try {
      const path = `/api/v1/lots/${encodeURIComponent(lot)}/runs?${query}`;
      const body = mapped ?? file.slice(0, file.size, "text/csv");
      setDone(await callApi<Uploaded>(path, { method: "POST", body, contentType: "text/csv" }));
      router.refresh();
    } catch (error) {
      setProblem(problemOf(error));
    }
    setPending(false);
  };

  const replaceable = runs.filter((run) => run.purpose === purpose);
  const ready = file !== undefined && purpose !== "" && (table === undefined || mapped !== undefined);
  return (
    <Card
      title="Upload readings"
      note="CSV as described, or any table with its columns mapped; at most 64 MiB and 600,000 rows"
    >
      <form
        className="flex flex-col gap-4"
        onSubmit={(event) => {
          event.preventDefault();
          void send();
        }}
      >
        <FileDrop
          label="Choose the readings"
          accept=".csv,.txt,.xlsx"
          maxBytes={MAX_BYTES}
          onFile={(next) => void choose(next)}
          help="Columns serial, point, chamber_c (°C by the reference sensor, corrected), soak_min, device_temp, load_kg, signal_mv_v, taken_at; optional position, hardware_id, dwell_s, output_mv_v."
        />
        {table ? <ColumnMapping table={table} onMapped={setMapped} /> : null}
        {plans.length > 0 ? (
          <Select
            label="Planned as"
            placeholder="No planned run"
            value={plan}
            onChange={(event) => choosePlan(event.currentTarget.value)}
            options={plans.map((one) => ({ value: one.id, name: `${one.name}, ${one.purpose} run` }))}
            help="What was planned and what was read are held against each other: missing readings, swapped positions, other loads."
          />
        ) : null}
        <div className="grid gap-4 md:grid-cols-2">
          <Select
            label="Purpose"
            options={PURPOSES}
            placeholder="What the run is for"
            required
            value={purpose}
            onChange={(event) => changePurpose(event.currentTarget.value)}
          />
          <Select
            label="Replaces"
            placeholder="No earlier run"
            disabled={replaceable.length === 0}
            value={supersedes}
            onChange={(event) => {
              setSupersedes(event.currentTarget.value);
              setPlan("");
            }}
            options={replaceable.map((run) => ({
              value: run.id,
              name: `${run.purpose} run of ${formatDateTime(run.createdAt)}, ${formatNumberOf(run.devices, "device")}`,
            }))}
            help="Coefficients that rest on the replaced run become stale."
          />
        </div>
        {supersedes ? (
          <TextArea
            label="Why the earlier run is replaced"
            required
            maxLength={2000}
            value={reason}
            onChange={(event) => setReason(event.currentTarget.value)}
          />
        ) : null}
        <EquipmentChoice legend="Equipment used" equipment={equipment} used={used} onUsed={setUsed} />
        <Checkbox
          label="Add devices that the lot doesn't have yet"
          checked={addDevices}
          onChange={(event) => setAddDevices(event.currentTarget.checked)}
          help="Without it a serial that is not in the lot is an error, which catches mistyped serials."
        />
        <div role="alert">{problem ? <RowErrors problem={problem} errors={rowErrorsOf(problem)} /> : null}</div>
        {done ? <Stored lot={lot} run={done} /> : null}
        <div>
          <Button type="submit" look="primary" disabled={!ready} pending={pending} pendingText="Uploading and checking">
            Upload the run
          </Button>
        </div>
      </form>
    </Card>
  );
}

function Stored({ lot, run }: { lot: string; run: Uploaded }) {
  const open = run.findings.filter((finding) => finding.severity !== "note");
  return (
    <Notice tone={open.length > 0 ? "caution" : "good"} title="The run is stored">
      <p role="status">
        {formatNumberOf(run.rows, "reading")} of {formatNumberOf(run.devices, "device")}
        {run.added > 0 ? `, ${formatNumberOf(run.added, "device")} added to the lot` : ""}
        {run.staleSets > 0 ? `; ${formatNumberOf(run.staleSets, "coefficient set")} became stale` : ""}.{" "}
        <Link href={`/runs/${run.id}`}>Open the run</Link> or go on to{" "}
        <Link href={`/lots/${encodeURIComponent(lot)}/coefficients`}>coefficients</Link>.
      </p>
      {open.length > 0 ? (
        <ul className="mt-1 list-disc pl-5">
          {open.map((finding) => (
            <li key={finding.id}>
              {finding.serial ? <span className="font-mono">{finding.serial}: </span> : null}
              {finding.message}
            </li>
          ))}
        </ul>
      ) : null}
    </Notice>
  );
}
