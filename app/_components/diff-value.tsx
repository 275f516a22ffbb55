export interface DiffValueProps {
  /** Formatted; null where it was not there. */
  from: string | null;
  to: string | null;
  unit?: string;
  /** Formatted step in the same unit, with its sign. */
  step?: string;
  /** Step in stored integers (LSB). */
  lsb?: string;
}

/** old → new, with the step in the value's unit and in stored steps. */
export function DiffValue({ from, to, unit, step, lsb }: DiffValueProps) {
  return (
    <span className="inline-flex flex-wrap gap-x-2 font-mono text-sm">
      <span className="whitespace-nowrap">
        <span className="sr-only">was </span>
        <span className="text-ink-soft">{from ?? "none"}</span>
        <span aria-hidden="true"> → </span>
        <span className="sr-only">, is </span>
        <span>{to ?? "none"}</span>
        {unit ? <span className="font-sans text-ink-soft"> {unit}</span> : null}
      </span>
      {step || lsb ? (
        <span className="text-xs leading-[1.7] whitespace-nowrap text-ink-soft">
          {[step, lsb ? `${lsb} steps` : ""].filter(Boolean).join(" · ")}
        </span>
      ) : null}
    </span>
  );
}
