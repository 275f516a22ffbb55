import type { ReactNode } from "react";
import { Card } from "@/app/_components/card";
import { StateMark } from "@/app/_components/state/state-mark";
import { stateOf } from "@/app/_components/state/state-of";
import { TimeText } from "@/app/_components/time-text";
import type { PackageView } from "@/schemas/api/packages";
import { CheckEvidence } from "../check-evidence";
import { verdictOf } from "../check-list";
import { checkName } from "../check-names";

type Check = PackageView["checks"][number];

/** One check: verdict, what it found, its evidence, and the waiver or the way to one. */
export function CheckCard({
  check,
  waivers,
  waive,
}: {
  check: Check;
  waivers: PackageView["waivers"];
  waive?: ReactNode;
}) {
  const verdict = verdictOf(check, waivers);
  const waiver = waivers.find((one) => one.check === check.code);
  const look = verdict === "fail" ? "bad" : verdict === "warn" ? "caution" : "plain";
  return (
    <Card
      look={look}
      title={
        <span id={check.code} className="scroll-mt-16">
          {checkName(check.code)}
        </span>
      }
      aside={<StateMark {...stateOf("check", verdict)} />}
    >
      <p className="max-w-[90ch]">{check.message}</p>
      {waiver ? (
        <p className="mt-2 border-l-2 border-ochre pl-3 text-sm">
          Waived by {waiver.by}, <TimeText at={waiver.at} />: “{waiver.reason}”
        </p>
      ) : null}
      <details className="mt-2 min-w-0" open={verdict === "fail" || verdict === "warn"}>
        <summary className="text-sm font-semibold text-slate">Evidence</summary>
        <div className="mt-2 flex flex-col gap-3">
          <CheckEvidence code={check.code} evidence={check.evidence} />
        </div>
      </details>
      {waive ? <div className="mt-3">{waive}</div> : null}
    </Card>
  );
}
