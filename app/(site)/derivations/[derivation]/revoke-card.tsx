"use client";

import Link from "next/link";
import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { StateMark } from "@/app/_components/state/state-mark";
import { stateOf } from "@/app/_components/state/state-of";
import { formatNumberOf } from "@/lib/domain/format/figure";
import type { SetPackage } from "@/schemas/api/derivation-tables";

export interface RevokeCardProps {
  approved: number;
  /** How many of the approved ones are selected in the table. */
  selected: number;
  packages: readonly SetPackage[];
  onRevoke: () => void;
}

/** Takes an approval back; says before what it reaches and what it doesn't. */
export function RevokeCard({ approved, selected, packages, onRevoke }: RevokeCardProps) {
  const count = selected || approved;
  return (
    <Card title="Take approval back" look="bad">
      <p className="mb-2 text-sm">
        {formatNumberOf(approved, "set")} approved here. A revoked set is never packed again. What devices carry already
        does not change by it, and a live package stays live until it is withdrawn.
      </p>
      <Consequences packages={packages} />
      <div className="mt-3">
        <Button look="danger" onClick={onRevoke}>
          Revoke coefficients of {formatNumberOf(count, selected ? "selected device" : "device")}
        </Button>
      </div>
    </Card>
  );
}

/** The packages that carry coefficients of the derivation, live or not, with what becomes of each. */
export function Consequences({ packages }: { packages: readonly SetPackage[] }) {
  if (packages.length === 0) return <p className="text-sm text-ink-soft">No package carries these coefficients.</p>;
  return (
    <ul className="flex flex-col gap-1 text-sm">
      {packages.map((one) => (
        <li key={one.id} className="flex flex-wrap items-baseline gap-x-3">
          <Link href={`/packages/${one.id}`}>Package {one.version}</Link>
          <StateMark {...stateOf("package", one.state)} />
          <span className="text-ink-soft">
            {formatNumberOf(one.devices, "device")} with these coefficients;{" "}
            {effects[one.state] ?? "nothing changes for it"}
          </span>
        </li>
      ))}
    </ul>
  );
}

const effects: Record<string, string> = {
  live: "stays live until it is withdrawn, stations go on writing it",
  superseded: "can't be made live again",
  draft: "can't be submitted any more: build anew",
  "in-review": "can't be approved any more: build anew",
  approved: "can't be released any more: build anew",
  building: "its build fails",
};
