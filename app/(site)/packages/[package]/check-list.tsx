import { StateMark } from "@/app/_components/state/state-mark";
import { stateOf } from "@/app/_components/state/state-of";
import { TimeText } from "@/app/_components/time-text";
import { checkName } from "./check-names";

export interface ShownCheck {
  code: string;
  verdict: "pass" | "warn" | "fail";
  message: string;
}

export interface ShownWaiver {
  check: string;
  by: string;
  reason: string;
  at: string;
}

const order = ["fail", "warn", "pass"];

/** A check's verdict as people see it: a warning with a waiver is waived. */
export function verdictOf(check: ShownCheck, waivers: readonly ShownWaiver[]): string {
  return check.verdict === "warn" && waivers.some((waiver) => waiver.check === check.code) ? "waived" : check.verdict;
}

/** Checks in short, those that block first: verdict, what was looked at, what was found, and who waived it. */
export function CheckList({ checks, waivers }: { checks: readonly ShownCheck[]; waivers: readonly ShownWaiver[] }) {
  const sorted = [...checks].sort((a, b) => order.indexOf(a.verdict) - order.indexOf(b.verdict));
  return (
    <ul className="flex flex-col">
      {sorted.map((check) => {
        const waiver = waivers.find((one) => one.check === check.code);
        return (
          <li
            key={check.code}
            className="grid grid-cols-[4.75rem_1fr] gap-x-3 border-b border-rule/55 py-1.5 text-sm last:border-0"
          >
            <span>
              <StateMark {...stateOf("check", verdictOf(check, waivers))} />
            </span>
            <span className="min-w-0">
              {checkName(check.code)}
              <span className="block text-xs text-ink-soft">{check.message}</span>
              {waiver ? (
                <span className="mt-0.5 block text-xs">
                  {waiver.by}, <TimeText at={waiver.at} />: “{waiver.reason}”
                </span>
              ) : null}
            </span>
          </li>
        );
      })}
    </ul>
  );
}
