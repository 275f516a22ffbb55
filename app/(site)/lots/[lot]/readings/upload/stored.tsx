import Link from "next/link";
import { Notice } from "@/app/_components/notice";
import { formatNumberOf } from "@/lib/domain/format/figure";
import type { Uploaded } from "./send-run";

/** A run that was taken, with what to look at next. */
export function Stored({ lot, run }: { lot: string; run: Uploaded }) {
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
