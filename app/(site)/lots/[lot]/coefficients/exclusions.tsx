"use client";

import { Button } from "@/app/_components/button";
import { TextInput } from "@/app/_components/form/text-input";
import type { Exclusion } from "./derive-options";

/** Devices that are left out of a derivation, each with its reason. */
export function Exclusions({
  exclusions,
  onChange,
}: {
  exclusions: readonly Exclusion[];
  onChange: (next: Exclusion[]) => void;
}) {
  const put = (index: number, part: Partial<Exclusion>) =>
    onChange(exclusions.map((one, at) => (at === index ? { ...one, ...part } : one)));
  return (
    <fieldset className="m-0 min-w-0">
      <legend className="mb-1 text-sm font-semibold">Devices left out</legend>
      <p className="mb-2 text-xs text-ink-soft">
        An excluded device gets no coefficients; it stays visible with the reason, and who excludes can't approve. The
        preview shows what leaving it out does before anything is stored.
      </p>
      <div className="flex flex-col gap-2.5">
        {exclusions.map((one, index) => (
          <div key={one.key} className="grid items-end gap-2.5 sm:grid-cols-[14rem_1fr_auto]">
            <TextInput
              label="Serial"
              code
              required
              value={one.serial}
              onChange={(event) => put(index, { serial: event.currentTarget.value })}
            />
            <TextInput
              label="Reason"
              required
              maxLength={2000}
              value={one.reason}
              onChange={(event) => put(index, { reason: event.currentTarget.value })}
            />
            <Button onClick={() => onChange(exclusions.filter((other) => other !== one))}>Keep it in</Button>
          </div>
        ))}
        <div>
          <Button onClick={() => onChange([...exclusions, { key: Date.now(), serial: "", reason: "" }])}>
            Exclude a device
          </Button>
        </div>
      </div>
    </fieldset>
  );
}
