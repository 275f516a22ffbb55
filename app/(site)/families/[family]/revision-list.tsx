import Link from "next/link";
import { StateMark } from "@/app/_components/state/state-mark";
import { stateOf } from "@/app/_components/state/state-of";
import { TimeText } from "@/app/_components/time-text";
import type { FamilyRevisionView } from "@/lib/services/families/get-family";

export interface RevisionListProps {
  code: string;
  revisions: readonly FamilyRevisionView[];
  /** Number of the one whose values are shown. */
  shown: number;
}

/** A family's revisions with their states and who decided, newest first. */
export function RevisionList({ code, revisions, shown }: RevisionListProps) {
  return (
    <ol className="flex flex-col">
      {revisions.map((revision) => (
        <li key={revision.id} className="border-b border-rule py-2 last:border-0">
          <div className="flex flex-wrap items-baseline gap-x-3">
            <Link
              href={`/families/${code}?revision=${revision.number}`}
              aria-current={revision.number === shown ? "true" : undefined}
              className={revision.number === shown ? "font-semibold" : ""}
            >
              Revision {revision.number}
            </Link>
            <StateMark {...stateOf("revision", revision.state)} />
          </div>
          <p className="text-sm text-ink-soft">
            {revision.createdBy}, <TimeText at={revision.createdAt} />
          </p>
          {revision.decisions.map((decision) => (
            <p key={decision.at} className="text-sm text-ink-soft">
              {decision.decision === "approve" ? "Published" : "Refused"} by {decision.name},{" "}
              <TimeText at={decision.at} />
              {decision.reason ? <span className="block text-ink">“{decision.reason}”</span> : null}
            </p>
          ))}
        </li>
      ))}
    </ol>
  );
}
