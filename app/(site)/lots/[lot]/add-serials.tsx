"use client";

import { useQueryClient } from "@tanstack/react-query";
import { useRouter } from "next/navigation";
import { useState } from "react";
import { callApi, type ProblemDetails, problemOf } from "@/app/_components/api-client";
import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { FormError } from "@/app/_components/form/form-error";
import { TextArea } from "@/app/_components/form/text-area";
import { useToast } from "@/app/_components/toast";
import { formatCount, formatNumberOf } from "@/lib/domain/format/figure";
import { PasteSerials, RuleSerials, type SerialsGiven, TableSerials } from "./serials-given";

interface Added {
  added: number;
  known: number;
  batchesSet?: number;
}

const WAYS = { paste: "Type or paste", table: "With batches, from a table", rule: "Number by a rule" } as const;
type Way = keyof typeof WAYS;

const nothing: SerialsGiven = { serials: [], hint: "" };

/** Adds serials, pasted, from a table with their batches, or numbered by a rule, after showing what they will be. */
export function AddSerials({ lot, open }: { lot: string; open: boolean }) {
  const router = useRouter();
  const lists = useQueryClient();
  const tell = useToast();
  const [way, setWay] = useState<Way>("paste");
  const [reason, setReason] = useState("");
  const [given, setGiven] = useState(nothing);
  const [pending, setPending] = useState(false);
  const [problem, setProblem] = useState<ProblemDetails | null>(null);
  const [round, setRound] = useState(0);

  const add = async () => {
    setPending(true);
    try {
      // By the API and not by an action: 60,000 serials are more than an action's body takes.
      const path = `/api/v1/lots/${lot}/devices`;
      const json = given.devices
        ? { devices: given.devices, ...(reason.trim() !== "" && { reason }) }
        : { serials: given.serials };
      const { added, known, batchesSet = 0 } = await callApi<Added>(path, { method: "POST", json });
      const before = known > 0 ? `${formatNumberOf(known, "serial")} stood in the lot before` : "";
      const set =
        batchesSet > 0 ? `, ${formatNumberOf(batchesSet, "of them got its batches", "of them got their batches")}` : "";
      const text = before ? `${before}${set}.` : undefined;
      tell({ tone: "good", title: `${formatNumberOf(added, "serial")} added to ${lot}`, text });
      setProblem(null);
      setGiven(nothing);
      setReason("");
      setRound(round + 1);
      await lists.invalidateQueries({ queryKey: ["list", path] });
      router.refresh();
    } catch (error) {
      setProblem(problemOf(error));
    }
    setPending(false);
  };
  const choose = (next: Way) => {
    setWay(next);
    setReason("");
    setGiven(nothing);
    setProblem(null);
  };

  return (
    <details open={open}>
      <summary className="mb-2 w-max cursor-pointer font-semibold text-copper-strong">Add serials</summary>
      <Card>
        <fieldset className="mb-3 flex flex-wrap gap-x-6 gap-y-1">
          <legend className="sr-only">How the serials are given</legend>
          {(Object.keys(WAYS) as Way[]).map((one) => (
            <label key={one} className="flex items-center gap-2">
              <input
                type="radio"
                name="way"
                checked={way === one}
                onChange={() => choose(one)}
                className="accent-copper"
              />
              {WAYS[one]}
            </label>
          ))}
        </fieldset>
        {way === "paste" ? <PasteSerials key={`p${round}`} onGiven={setGiven} /> : null}
        {way === "table" ? <TableSerials key={`t${round}`} onGiven={setGiven} /> : null}
        {way === "rule" ? <RuleSerials key={`r${round}`} lot={lot} onGiven={setGiven} /> : null}
        <Preview given={given} />
        <FormError problem={problem} />
        {problem?.code === "device.batch_differs" ? (
          <div className="mt-3">
            <TextArea
              label="Why the batches told before are corrected"
              maxLength={2000}
              value={reason}
              onChange={(event) => setReason(event.currentTarget.value)}
              help="Stands in the ledger for ever; then add them again."
            />
          </div>
        ) : null}
        <div className="mt-3 flex justify-end">
          <Button look="primary" disabled={given.serials.length === 0} pending={pending} onClick={add}>
            {given.serials.length === 0 ? "Add serials" : `Add ${formatNumberOf(given.serials.length, "serial")}`}
          </Button>
        </div>
      </Card>
    </details>
  );
}

function Preview({ given: { serials, hint } }: { given: SerialsGiven }) {
  const shown = serials.length <= 8 ? serials : [...serials.slice(0, 4), "…", ...serials.slice(-3)];
  return (
    <div role="status" className="my-3 text-sm">
      {hint ? <p className="font-medium text-ochre">{hint}</p> : null}
      {serials.length > 0 ? (
        <>
          <p className="text-ink-soft">{formatCount(serials.length)} to add:</p>
          <ul className="mt-1 flex flex-wrap gap-x-4 gap-y-1 font-mono">
            {shown.map((serial) => (
              <li key={serial}>{serial}</li>
            ))}
          </ul>
        </>
      ) : null}
    </div>
  );
}
