"use client";

import { usePathname, useSearchParams } from "next/navigation";
import { useEffect, useState } from "react";

/** Which serials are shown by what one field did: kept in the address beside the table's own state. */
export interface DifferenceFilterState {
  /** Name of a field; empty for any. */
  field: string;
  /** Least step, as typed; empty for any. */
  least: string;
}

/** The filter as the address has it, and how to change it. */
export function useDifferenceFilter(): [DifferenceFilterState, (change: Partial<DifferenceFilterState>) => void] {
  const path = usePathname();
  const params = useSearchParams();
  const state = { field: params.get("changes.field") ?? "", least: params.get("changes.least") ?? "" };
  const change = (part: Partial<DifferenceFilterState>) => {
    const next = { ...state, ...part };
    const query = new URLSearchParams(window.location.search);
    for (const key of ["field", "least"] as const) {
      if (next[key]) query.set(`changes.${key}`, next[key]);
      else query.delete(`changes.${key}`);
    }
    window.history.replaceState(null, "", query.size ? `${path}?${query}` : path);
  };
  return [state, change];
}

/** A text that has stood still for a moment: not every key pressed is a question to the server. */
export function useSettled(text: string, ms = 250): string {
  const [settled, setSettled] = useState(text);
  useEffect(() => {
    const timer = setTimeout(() => setSettled(text), ms);
    return () => clearTimeout(timer);
  }, [text, ms]);
  return settled;
}

const look = "h-[27px] rounded border border-rule bg-paper px-2 text-sm";

export interface DifferenceFilterProps extends DifferenceFilterState {
  fields: readonly string[];
  /** What the least step counts: "steps", or the field's unit. */
  measure: string;
  onChange: (change: Partial<DifferenceFilterState>) => void;
  largestFirst: boolean;
  onLargestFirst: (on: boolean) => void;
}

/** One line: only serials in which a field differs, by at least so much, and the largest step first. */
export function DifferenceFilter(props: DifferenceFilterProps) {
  const { field, least, fields, measure, onChange, largestFirst, onLargestFirst } = props;
  return (
    <span className="inline-flex flex-wrap items-center gap-2 text-ink">
      <select
        aria-label="Only serials in which this field differs"
        value={field}
        onChange={(event) => onChange({ field: event.currentTarget.value, least: "" })}
        className={look}
      >
        <option value="">any field</option>
        {fields.map((name) => (
          <option key={name} value={name}>
            {name}
          </option>
        ))}
      </select>
      {field ? (
        <label className="inline-flex items-center gap-1.5 text-sm text-ink-soft">
          by at least
          <input
            type="text"
            inputMode="decimal"
            value={least}
            onChange={(event) => onChange({ least: event.currentTarget.value })}
            className={`${look} w-24 font-mono text-ink`}
          />
          {measure}
        </label>
      ) : null}
      <button
        type="button"
        aria-pressed={largestFirst}
        onClick={() => onLargestFirst(!largestFirst)}
        title="Each serial by its largest step: as a share of the largest step of that parameter in any serial"
        className={`h-[27px] rounded border px-[9px] text-sm ${largestFirst ? "border-copper font-semibold text-copper-strong" : "border-rule text-ink-soft hover:border-ink-faint"}`}
      >
        Largest step first
      </button>
    </span>
  );
}
