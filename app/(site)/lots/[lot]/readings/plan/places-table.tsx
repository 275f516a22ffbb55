"use client";

import { inputLook } from "@/app/_components/form/field";
import { ScrollRegion } from "@/app/_components/scroll-region";
import { formatCount } from "@/lib/domain/format/figure";
import type { PlannedDevice } from "@/lib/domain/run-plan/run-plan";
import { FindingsHere, type ShownPlanFinding } from "./findings-here";

/** Rows shown to be changed by hand; in a larger run the others follow the rule. */
const SHOWN_MAX = 200;

export interface PlacesTableProps {
  devices: readonly PlannedDevice[];
  findings: readonly ShownPlanFinding[];
  onPlace: (serial: string, place: string) => void;
}

/** Devices with their places, each to be changed by hand, and what is to be said of each. */
export function PlacesTable({ devices, findings, onPlace }: PlacesTableProps) {
  if (devices.length === 0) return null;
  const about = new Map<string, ShownPlanFinding[]>();
  for (const finding of findings)
    if (finding.serial !== null) about.set(finding.serial, [...(about.get(finding.serial) ?? []), finding]);
  // What is wrong is always shown, however far down it stands.
  const shown = devices.filter(({ serial }, index) => index < SHOWN_MAX || about.has(serial)).slice(0, 2 * SHOWN_MAX);
  return (
    <ScrollRegion label="Devices and places" className="relative mt-4 max-h-[420px] overflow-auto border border-rule">
      <table className="w-full">
        <thead>
          <tr>
            {["Place", "Serial", ""].map((name) => (
              <th
                key={name}
                scope="col"
                className="sticky top-0 border-b border-rule bg-raised px-3 py-1.5 text-left text-xs font-semibold text-ink-soft"
              >
                {name || <span className="sr-only">Findings</span>}
              </th>
            ))}
          </tr>
        </thead>
        <tbody>
          {shown.map(({ serial, position }) => (
            <tr key={serial} className="border-b border-rule/55 last:border-0">
              <td className="px-3 py-1">
                <input
                  aria-label={`Place of ${serial}`}
                  value={position}
                  maxLength={32}
                  aria-invalid={about.get(serial)?.some((one) => one.code.startsWith("plan.position")) || undefined}
                  onChange={(event) => onPlace(serial, event.currentTarget.value)}
                  className={`${inputLook} h-8 min-w-28 font-mono text-sm`}
                />
              </td>
              <td className="px-3 py-1 font-mono text-sm whitespace-nowrap">{serial}</td>
              <td className="w-full min-w-56 px-3 py-1">
                <FindingsHere findings={about.get(serial) ?? []} />
              </td>
            </tr>
          ))}
        </tbody>
      </table>
      {devices.length > shown.length ? (
        <p className="px-3 py-2 text-sm text-ink-soft">
          {formatCount(devices.length - shown.length)} more follow the rule.
        </p>
      ) : null}
    </ScrollRegion>
  );
}
