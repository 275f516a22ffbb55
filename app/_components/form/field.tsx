import { type ReactNode, useId } from "react";
import { ToneShape } from "@/app/_components/state/state-mark";

export interface FieldText {
  label: ReactNode;
  /** Under the input: what is meant, in which form. */
  help?: ReactNode;
  /** Says how to mend it. */
  error?: string;
  /** In the input's right end. */
  unit?: string;
}

/** What an input needs so that label, help and error are announced with it. */
export interface FieldControl {
  id: string;
  "aria-invalid": true | undefined;
  "aria-describedby": string | undefined;
}

export const inputLook =
  "block w-full rounded border bg-paper px-3 text-ink disabled:bg-sunk disabled:text-ink-soft read-only:bg-sunk border-ink-faint aria-invalid:border-oxide aria-invalid:outline-oxide";

/** Label above, control, help and error under it. The child gets the attributes its input has to carry. */
export function Field({
  label,
  help,
  error,
  unit,
  children,
}: FieldText & { children: (control: FieldControl) => ReactNode }) {
  const id = useId();
  const describedBy = [help ? `${id}-help` : "", error ? `${id}-error` : ""].filter(Boolean).join(" ");
  return (
    <div className="min-w-0">
      <label htmlFor={id} className="mb-1 block text-sm font-semibold">
        {label}
        {unit ? <span className="sr-only">, in {unit}</span> : null}
      </label>
      <div className="relative">
        {children({ id, "aria-invalid": error ? true : undefined, "aria-describedby": describedBy || undefined })}
        {unit ? (
          <span
            aria-hidden="true"
            className="pointer-events-none absolute inset-y-0 right-3 flex items-center text-sm text-ink-soft"
          >
            {unit}
          </span>
        ) : null}
      </div>
      {error ? <FieldError id={`${id}-error`}>{error}</FieldError> : null}
      {help ? (
        <p id={`${id}-help`} className="mt-1 text-xs text-ink-soft">
          {help}
        </p>
      ) : null}
    </div>
  );
}

export function FieldError({ id, children }: { id?: string; children: ReactNode }) {
  return (
    <p id={id} className="mt-1 flex items-baseline gap-1.5 text-sm font-medium text-oxide">
      <ToneShape tone="bad" size={10} />
      {children}
    </p>
  );
}

/** Room in the input's right end for a unit of that length. */
export function unitPadding(unit: string | undefined): { paddingRight: string } | undefined {
  return unit ? { paddingRight: `calc(${unit.length}ch + 24px)` } : undefined;
}
