import type { Metadata } from "next";
import Link from "next/link";
import { LinkButton } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { Facts } from "@/app/_components/facts";
import { Notice } from "@/app/_components/notice";
import { stateOf } from "@/app/_components/state/state-of";
import { DataTable } from "@/app/_components/table/data-table";
import { TimeText } from "@/app/_components/time-text";
import { TitleRow } from "@/app/_components/title-row";
import { formatCount } from "@/lib/domain/format/figure";
import { formatDate, formatDuration } from "@/lib/domain/format/time";
import { soakMinutesOf } from "@/lib/domain/run-plan/run-plan";
import { holds, pageContext } from "@/lib/http/page-context";
import type { RunPlanView } from "@/schemas/api/run-plans";
import { FindingsHere } from "../../plan/findings-here";
import { DropPlan } from "./drop-plan";
import { loadPlan, type PlanParams } from "./load-plan";
import { PointsTable } from "./points-table";

export const metadata: Metadata = { title: "Planned run" };

export default async function PlanPage({ params }: PlanParams) {
  const ctx = await pageContext();
  const plan = await loadPlan(ctx, params);
  const isEngineer = holds(ctx, "engineer");
  const lot = `/lots/${encodeURIComponent(plan.lot)}`;
  const here = `${lot}/readings/plans/${plan.id}`;
  return (
    <>
      <TitleRow
        breadcrumb={[
          { name: "Lots", href: "/lots" },
          { name: plan.lot, href: lot },
          { name: "Readings", href: `${lot}/readings` },
          { name: "Planned run" },
        ]}
        title={plan.name}
        state={stateOf("run-plan", plan.state)}
        note={
          <>
            {plan.purpose} run, planned by {plan.createdBy}, <TimeText at={plan.createdAt} />
          </>
        }
        actions={
          plan.state === "dropped" ? undefined : (
            <>
              <LinkButton href={`/api/v1/run-plans/${plan.id}/template`} download>
                Template to fill in, CSV
              </LinkButton>
              <LinkButton href={`${here}/sheet`} look="primary">
                Run sheet
              </LinkButton>
            </>
          )
        }
      />
      <div className="flex flex-col gap-[18px]">
        <PlanStanding plan={plan} isEngineer={isEngineer} />
        <Card title="What it asks for">
          <Facts
            facts={[
              { value: formatCount(plan.deviceCount), label: "devices" },
              { value: formatCount(plan.points.length), label: "points" },
              { value: formatCount(plan.rows), label: "readings" },
              {
                value: formatDuration(soakMinutesOf(plan.points) * 60),
                label: "of soak at least, ways between not counted",
              },
            ]}
          />
          {plan.findings.length > 0 ? (
            <ul className="mt-4 flex flex-col gap-0.5">
              {plan.findings.map((finding) => (
                <li
                  key={`${finding.code}${finding.serial}${finding.point}${finding.message}`}
                  className="flex flex-wrap gap-x-2 text-sm"
                >
                  <PlaceOf finding={finding} />
                  <FindingsHere findings={[finding]} />
                </li>
              ))}
            </ul>
          ) : null}
          {plan.notes ? <p className="mt-4 max-w-[72ch] text-sm whitespace-pre-line">{plan.notes}</p> : null}
        </Card>
        <Card title="Temperatures and loads" note="In working order; unloaded is read first at each">
          <PointsTable points={plan.points} />
        </Card>
        <Card
          title="Devices and their places"
          note={
            plan.sampleDraw ? (
              <>
                Drawn at random, seed <span className="font-mono break-all">{plan.sampleDraw.seed}</span>
              </>
            ) : undefined
          }
        >
          <DataTable
            name={`devices of ${plan.name}`}
            rows={plan.devices}
            rowKey="serial"
            columns={[
              { key: "position", header: "Place", format: { as: "code" } },
              { key: "serial", header: "Serial", format: { as: "link", href: "/trace/{serial}" } },
            ]}
            empty={{ title: "No devices" }}
          />
        </Card>
        <Card title="Equipment">
          <EquipmentList plan={plan} />
        </Card>
        {isEngineer && plan.state === "planned" ? <DropPlan id={plan.id} name={plan.name} /> : null}
      </div>
    </>
  );
}

/** What became of the plan, and what to do next with it. */
function PlanStanding({ plan, isEngineer }: { plan: RunPlanView; isEngineer: boolean }) {
  if (plan.dropped)
    return (
      <Notice tone="info" title="Dropped">
        By {plan.dropped.by}, <TimeText at={plan.dropped.at} />: {plan.dropped.reason}
      </Notice>
    );
  const readings = `/lots/${encodeURIComponent(plan.lot)}/readings`;
  const run = plan.runs.at(-1);
  if (run)
    return (
      <Notice tone="good" title="Read">
        <Link href={`/runs/${run.id}`}>Its readings</Link> were uploaded <TimeText at={run.createdAt} />
        {plan.runs.length > 1 ? `, after ${plan.runs.length - 1} that were replaced` : ""}. What differs from the plan
        stands among the run's findings.
        {isEngineer ? (
          <>
            {" "}
            <Link href={`${readings}?supersedes=${run.id}#upload`}>Replace them with a corrected file</Link>
          </>
        ) : null}
      </Notice>
    );
  return (
    <Notice tone="info" title="Waits for its readings">
      Fill in the template at the chamber, or upload what your reader writes: the columns can be mapped.{" "}
      {isEngineer ? (
        <Link href={`${readings}?plan=${plan.id}#upload`}>Upload readings for this plan</Link>
      ) : (
        "An engineer uploads them."
      )}
    </Notice>
  );
}

function PlaceOf({ finding }: { finding: RunPlanView["findings"][number] }) {
  if (finding.serial !== null) return <span className="font-mono">{finding.serial}</span>;
  if (finding.point !== null) return <span>Point {finding.point}</span>;
  return null;
}

function EquipmentList({ plan }: { plan: RunPlanView }) {
  if (plan.equipment.length === 0) return <p className="text-sm text-ink-soft">None is named.</p>;
  return (
    <ul className="text-sm">
      {plan.equipment.map((one) => (
        <li key={one.code}>
          <span className="font-mono">{one.code}</span>, {one.kind}, certificate {one.certificate}, due{" "}
          {formatDate(one.calibratedUntil)}
        </li>
      ))}
    </ul>
  );
}
