import { StateMark } from "@/app/_components/state/state-mark";
import { stateOf } from "@/app/_components/state/state-of";
import type { RunPlanCheck } from "@/schemas/api/run-plans";

export type ShownPlanFinding = RunPlanCheck["findings"][number];

const words = { hard: "can't be planned", soft: "look at it", note: "note" };

/** What is to be said at this place of the plan. */
export function FindingsHere({ findings }: { findings: readonly ShownPlanFinding[] }) {
  if (findings.length === 0) return null;
  return (
    <ul className="flex flex-col gap-0.5 text-sm">
      {findings.map((finding) => (
        <li
          key={`${finding.code}${finding.serial}${finding.point}${finding.message}`}
          className="flex flex-wrap gap-x-2.5"
        >
          <PlanMark severity={finding.severity} />
          <span className="min-w-0">{finding.message}</span>
        </li>
      ))}
    </ul>
  );
}

/** A finding's severity in the words that fit what is only planned. */
export function PlanMark({ severity }: { severity: ShownPlanFinding["severity"] }) {
  return <StateMark {...stateOf("finding", severity)} word={words[severity]} title={undefined} />;
}
