import type { ComponentProps } from "react";
import { Field, type FieldText, inputLook, unitPadding } from "@/app/_components/form/field";

export type TextInputProps = FieldText &
  Omit<ComponentProps<"input">, "id" | "className" | "children"> & {
    /** For serials, codes and digests. */
    code?: boolean;
  };

/** One line of text. Works with `register("name")` and in plain forms. */
export function TextInput({ label, help, error, unit, code, ...input }: TextInputProps) {
  return (
    <Field label={label} help={help} error={error} unit={unit}>
      {(control) => (
        <input
          type="text"
          {...input}
          {...control}
          style={unitPadding(unit)}
          className={`${inputLook} h-[38px] ${code ? "font-mono" : ""}`}
        />
      )}
    </Field>
  );
}
