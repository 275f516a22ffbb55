import { StateMark } from "@/app/_components/state/state-mark";
import { stateOf } from "@/app/_components/state/state-of";

export interface ShownFinding {
  id: string;
  code: string;
  severity: string;
  serial: string | null;
  point: number | null;
  message: string;
}

const order = ["hard", "soft", "note"];

/** Findings in words, those that block first. */
export function FindingsList({ findings, empty }: { findings: readonly ShownFinding[]; empty: string }) {
  if (findings.length === 0) return <p className="text-sm text-ink-soft">{empty}</p>;
  const sorted = [...findings].sort((a, b) => order.indexOf(a.severity) - order.indexOf(b.severity));
  return (
    <ul className="flex flex-col">
      {sorted.map((finding) => (
        <li
          key={finding.id}
          className="grid gap-x-4 border-b border-rule/55 py-1.5 last:border-0 sm:grid-cols-[9.5rem_1fr]"
        >
          <StateMark {...stateOf("finding", finding.severity)} />
          <span className="min-w-0 text-sm">
            {finding.serial ? <span className="font-mono">{finding.serial}: </span> : null}
            {finding.message} <span className="font-mono text-xs text-ink-soft">{finding.code}</span>
          </span>
        </li>
      ))}
    </ul>
  );
}
