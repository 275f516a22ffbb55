import type { ComponentProps } from "react";
import { Field, type FieldText, inputLook } from "@/app/_components/form/field";

export type TextAreaProps = Omit<FieldText, "unit"> &
  Omit<ComponentProps<"textarea">, "id" | "className" | "children"> & {
    /** For pasted serials. */
    code?: boolean;
  };

/** Several lines: reasons, notes, pasted serials. */
export function TextArea({ label, help, error, code, ...area }: TextAreaProps) {
  return (
    <Field label={label} help={help} error={error}>
      {(control) => (
        <textarea rows={3} {...area} {...control} className={`${inputLook} py-2 ${code ? "font-mono text-sm" : ""}`} />
      )}
    </Field>
  );
}
