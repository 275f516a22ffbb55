import Link from "next/link";
import { StateMark } from "@/app/_components/state/state-mark";
import { stateOf } from "@/app/_components/state/state-of";
import { formatCount } from "@/lib/domain/format/figure";

export interface ShownFinding {
  id: string;
  code: string;
  severity: string;
  serial: string | null;
  point: number | null;
  message: string;
}

export interface FindingsListProps {
  findings: readonly ShownFinding[];
  empty: string;
  /** Address that a serial is put behind, where each device has a page of its own. */
  devicePath?: string;
}

const order = ["hard", "soft", "note"];

/** So many of one kind stand line by line; more are gathered under the first. */
const LINES_MAX = 3;

/** Findings in words, those that block first; many of one kind are gathered. */
export function FindingsList({ findings, empty, devicePath }: FindingsListProps) {
  if (findings.length === 0) return <p className="text-sm text-ink-soft">{empty}</p>;
  return (
    <ul className="flex flex-col">
      {groupsOf(findings).map((group) =>
        group.length > LINES_MAX ? (
          <Gathered key={group[0]?.id} group={group} devicePath={devicePath} />
        ) : (
          group.map((finding) => (
            <li key={finding.id} className={rowLook}>
              <StateMark {...stateOf("finding", finding.severity)} />
              <span className="min-w-0 text-sm">
                <Words finding={finding} devicePath={devicePath} /> <Code code={finding.code} />
              </span>
            </li>
          ))
        ),
      )}
    </ul>
  );
}

const rowLook = "grid gap-x-4 border-b border-rule/55 py-1.5 last:border-0 sm:grid-cols-[9.5rem_1fr]";

/** By severity, then by kind, each kind in the order of its first finding. */
function groupsOf(findings: readonly ShownFinding[]): ShownFinding[][] {
  const groups = new Map<string, ShownFinding[]>();
  for (const finding of findings) {
    const key = `${finding.severity} ${finding.code}`;
    const group = groups.get(key);
    if (group) group.push(finding);
    else groups.set(key, [finding]);
  }
  const rank = (group: ShownFinding[]) => order.indexOf(group[0]?.severity ?? "");
  return [...groups.values()].sort((a, b) => rank(a) - rank(b));
}

function Gathered({ group, devicePath }: { group: readonly ShownFinding[]; devicePath?: string }) {
  const first = group[0] as ShownFinding;
  return (
    <li className={rowLook}>
      <StateMark {...stateOf("finding", first.severity)} />
      <div className="min-w-0 text-sm">
        <Words finding={first} devicePath={devicePath} /> <Code code={first.code} />
        <details>
          <summary className="w-max text-slate hover:text-copper-strong">
            {formatCount(group.length - 1)} more of this kind
          </summary>
          <ul className="mt-1 max-h-80 overflow-y-auto border-l-2 border-rule pl-3">
            {group.slice(1).map((finding) => (
              <li key={finding.id} className="py-0.5">
                <Words finding={finding} devicePath={devicePath} />
              </li>
            ))}
          </ul>
        </details>
      </div>
    </li>
  );
}

function Words({ finding: { serial, message }, devicePath }: { finding: ShownFinding; devicePath?: string }) {
  if (!serial) return message;
  const name = <span className="font-mono">{serial}</span>;
  return (
    <>
      {devicePath ? (
        <Link href={`${devicePath}/${encodeURIComponent(serial)}`} prefetch={false}>
          {name}
        </Link>
      ) : (
        name
      )}
      : {message}
    </>
  );
}

function Code({ code }: { code: string }) {
  return <span className="font-mono text-xs text-ink-soft">{code}</span>;
}
