import type { ComponentProps } from "react";
import { Field, type FieldText, inputLook } from "@/app/_components/form/field";

export interface SelectOption {
  value: string;
  name: string;
  disabled?: boolean;
}

export type SelectProps = Omit<FieldText, "unit"> &
  Omit<ComponentProps<"select">, "id" | "className" | "children"> & {
    options: readonly SelectOption[];
    /** Shown first, with an empty value, where nothing is chosen yet. */
    placeholder?: string;
  };

/** A choice of a short list. */
export function Select({ label, help, error, options, placeholder, ...select }: SelectProps) {
  return (
    <Field label={label} help={help} error={error}>
      {(control) => (
        <select {...select} {...control} className={`${inputLook} enabled:read-only:bg-paper h-[38px]`}>
          {placeholder !== undefined ? <option value="">{placeholder}</option> : null}
          {options.map((option) => (
            <option key={option.value} value={option.value} disabled={option.disabled}>
              {option.name}
            </option>
          ))}
        </select>
      )}
    </Field>
  );
}
