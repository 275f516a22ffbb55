import Link from "next/link";
import { Card } from "@/app/_components/card";
import { Digest } from "@/app/_components/digest";
import { PrintButton } from "@/app/_components/print-button";
import { TimeText } from "@/app/_components/time-text";
import type { DerivationView } from "@/schemas/api/derivations";

/** What a derivation rests on, who made it and who decided what. */
export function Origin({ view }: { view: DerivationView }) {
  return (
    <Card title="Where it comes from" aside={<PrintButton look="quiet">Print</PrintButton>}>
      <div className="grid gap-4 text-sm lg:grid-cols-2">
        <div className="min-w-0">
          <p>
            Family <Link href={`/families/${view.family}?revision=${view.revision}`}>{view.family}</Link>, revision{" "}
            {view.revision}
            {view.method === "import" ? "" : `, arithmetic ${view.engine}`}
          </p>
          <Digest value={view.sha256} name="digest of what it was computed from" />
          <ul className="mt-2">
            {view.runs.map((run) => (
              <li key={run.id}>
                <Link href={`/runs/${run.id}`}>{run.purpose} run</Link> <Digest value={run.sha256} short />
                {run.supersededBy ? <span className="text-ochre"> superseded since</span> : null}
              </li>
            ))}
          </ul>
          {view.exclude.length > 0 ? (
            <ul className="mt-2">
              {view.exclude.map((one) => (
                <li key={one.serial}>
                  <span className="font-mono">{one.serial}</span> excluded by {one.by}: {one.reason}
                </li>
              ))}
            </ul>
          ) : null}
        </div>
        <div className="min-w-0">
          <ul>
            {view.makers.map((maker) => (
              <li key={`${maker.name}${maker.act}`}>
                {maker.name} {maker.act}
                {maker.act === "uploaded" ? " readings" : ""}, <TimeText at={maker.at} />
              </li>
            ))}
          </ul>
          {view.approvals.map((one) => (
            <div key={`${one.at}${one.name}`} className="mt-2 border-l-2 border-rule pl-3">
              <p>
                {one.name}, <TimeText at={one.at} />: “{one.meaning}”
              </p>
              {one.reason ? <p className="text-ink-soft">{one.reason}</p> : null}
            </div>
          ))}
          {view.acknowledgements.length > 0 ? <Acknowledged view={view} /> : null}
        </div>
      </div>
    </Card>
  );
}

function Acknowledged({ view }: { view: DerivationView }) {
  const messages = new Map(view.findings.map((finding) => [finding.id, finding.message]));
  return (
    <ul className="mt-2">
      {view.acknowledgements.map((one) => (
        <li key={one.finding}>
          {one.by} accepted “{messages.get(one.finding) ?? one.finding}”: {one.reason}
        </li>
      ))}
    </ul>
  );
}
