"use client";

import Link from "next/link";
import { Checkbox } from "@/app/_components/form/checkbox";
import { formatDate } from "@/lib/domain/format/time";

export interface ChosenEquipment {
  code: string;
  kind: string;
  calibratedUntil: string;
  overdue: boolean;
}

/** Equipment that a run names, with what is past its date marked. */
export function EquipmentChoice({
  equipment,
  used,
  onUsed,
  legend,
}: {
  equipment: readonly ChosenEquipment[];
  used: readonly string[];
  onUsed: (codes: string[]) => void;
  legend: string;
}) {
  if (equipment.length === 0) {
    return (
      <p className="text-sm text-ink-soft">
        No equipment is on file. <Link href="/equipment">Add sensors, chamber, loads and reader</Link> so that a run can
        name them.
      </p>
    );
  }
  return (
    <fieldset className="m-0 min-w-0">
      <legend className="mb-1 text-sm font-semibold">{legend}</legend>
      <div className="flex flex-wrap gap-x-6 gap-y-1.5">
        {equipment.map(({ code, kind, calibratedUntil, overdue }) => (
          <Checkbox
            key={code}
            label={
              <>
                <span className="font-mono">{code}</span>{" "}
                <span className={overdue ? "text-ochre" : "text-ink-soft"}>
                  {kind}, {overdue ? "past its date of" : "due"} {formatDate(calibratedUntil)}
                </span>
              </>
            }
            checked={used.includes(code)}
            onChange={(event) =>
              onUsed(event.currentTarget.checked ? [...used, code] : used.filter((other) => other !== code))
            }
          />
        ))}
      </div>
    </fieldset>
  );
}
