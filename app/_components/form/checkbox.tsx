import { type ComponentProps, type ReactNode, useId } from "react";
import { FieldError } from "@/app/_components/form/field";

export type CheckboxProps = Omit<ComponentProps<"input">, "id" | "className" | "type" | "children"> & {
  label: ReactNode;
  help?: ReactNode;
  error?: string;
};

export function Checkbox({ label, help, error, ...input }: CheckboxProps) {
  const id = useId();
  const describedBy = [help ? `${id}-help` : "", error ? `${id}-error` : ""].filter(Boolean).join(" ");
  return (
    <div>
      <label htmlFor={id} className="flex items-start gap-2.5">
        <input
          {...input}
          id={id}
          type="checkbox"
          aria-invalid={error ? true : undefined}
          aria-describedby={describedBy || undefined}
          className="mt-[3px] size-4 flex-none accent-copper"
        />
        <span>{label}</span>
      </label>
      {error ? <FieldError id={`${id}-error`}>{error}</FieldError> : null}
      {help ? (
        <p id={`${id}-help`} className="mt-0.5 ml-[26px] text-xs text-ink-soft">
          {help}
        </p>
      ) : null}
    </div>
  );
}
