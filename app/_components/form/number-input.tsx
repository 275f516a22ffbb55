import type { ComponentProps } from "react";
import { Field, type FieldText, inputLook, unitPadding } from "@/app/_components/form/field";

export type NumberInputProps = FieldText & Omit<ComponentProps<"input">, "id" | "className" | "children" | "type">;

/** A number in figures, its unit in the right end. Text with a number pad, so that nothing typed is swallowed. */
export function NumberInput({ label, help, error, unit, ...input }: NumberInputProps) {
  return (
    <Field label={label} help={help} error={error} unit={unit}>
      {(control) => (
        <input
          {...input}
          {...control}
          type="text"
          inputMode="decimal"
          autoComplete="off"
          style={unitPadding(unit)}
          className={`${inputLook} h-[38px] font-mono`}
        />
      )}
    </Field>
  );
}
