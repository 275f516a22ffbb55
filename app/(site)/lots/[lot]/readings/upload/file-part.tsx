"use client";

import { Notice } from "@/app/_components/notice";
import { StateMark } from "@/app/_components/state/state-mark";
import { formatCount, formatNumberOf } from "@/lib/domain/format/figure";
import type { GivenRow } from "@/lib/domain/readings/given-table";
import { FileOptions } from "./file-options";
import type { PlacedError } from "./preview-row";
import { errorCountText, TablePreview } from "./table-preview";
import type { useMapping } from "./use-mapping";
import type { Checked, TableFacts, TableOptions } from "./worker-messages";

export interface FilePartProps {
  facts: TableFacts;
  mapping: ReturnType<typeof useMapping>;
  purposeChosen: boolean;
  checked?: Checked;
  /** What is wrong and stands in the preview. */
  marked?: { errors: PlacedError[]; total: number; rows: GivenRow[] };
  disabled: boolean;
  onReread: (options: TableOptions) => void;
}

/** The chosen file: how it is written, which column is which, its first rows and what is wrong in it. */
export function FilePart({ facts, mapping, purposeChosen, checked, marked, disabled, onReread }: FilePartProps) {
  const { map, missing, decimalComma, offset, offsetWrong } = mapping;
  return (
    <div className="flex flex-col gap-3">
      <FileOptions {...{ facts, decimalComma, offset, offsetWrong, disabled, onReread }} onChange={mapping.change} />
      <p className="flex flex-wrap items-baseline gap-x-3 gap-y-1 text-sm">
        <span className="font-semibold">{formatNumberOf(facts.rows, "row")}</span>
        <span className="text-ink-soft">{originText(mapping.origin, missing.length)}</span>
        <Verdict {...{ missing, purposeChosen, checked, marked }} />
      </p>
      {missing.length > 0 ? (
        <Notice tone="caution" title="Columns are missing">
          Choose above the table which columns are <span className="font-mono">{missing.join(", ")}</span>.
        </Notice>
      ) : null}
      <TablePreview
        facts={facts}
        map={map}
        options={mapping.options}
        errors={marked?.errors ?? []}
        wrongRows={marked?.rows ?? []}
        disabled={disabled}
        onColumn={mapping.setColumn}
      />
      {checked && checked.errorCount === 0 ? <Findings checked={checked} /> : null}
    </div>
  );
}

function originText(origin: "remembered" | "names" | "changed", missing: number): string {
  if (origin === "remembered") return "columns as accepted last for this family";
  if (origin === "changed") return "columns as chosen here";
  return missing === 0 ? "columns found by their names" : "some columns not found by their names";
}

function Verdict({
  missing,
  purposeChosen,
  checked,
  marked,
}: Pick<FilePartProps, "purposeChosen" | "checked" | "marked"> & { missing: readonly string[] }) {
  if (marked && marked.total > 0)
    return <StateMark tone="bad" word={errorCountText(marked.total, marked.errors.length)} />;
  if (checked)
    return <StateMark tone="good" word={`all rows can be sent: ${formatNumberOf(checked.devices, "device")}`} />;
  if (missing.length > 0) return null;
  return purposeChosen ? null : <StateMark tone="caution" word="choose the purpose, then the rows are checked" />;
}

/** What the rules will say of the run, before it is sent. */
function Findings({ checked }: { checked: Checked }) {
  const open = checked.findings.filter((finding) => finding.severity !== "note");
  if (open.length === 0) return null;
  return (
    <Notice
      tone="caution"
      title={`${formatCount(open.length)} ${open.length === 1 ? "finding" : "findings"} to expect`}
    >
      <ul className="list-disc pl-5">
        {open.slice(0, 8).map((finding) => (
          <li key={`${finding.code} ${finding.serial} ${finding.point}`}>
            {finding.serial ? <span className="font-mono">{finding.serial}: </span> : null}
            {finding.message}
          </li>
        ))}
      </ul>
      {open.length > 8 ? <p>The run's page lists all of them.</p> : null}
    </Notice>
  );
}
