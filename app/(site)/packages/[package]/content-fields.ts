import { decodedNumber } from "@/lib/domain/format/field-value";
import type { LayoutDocument } from "@/schemas/documents/layout";
import type { ContentField } from "./contents-table";

/** Fields in the layout's order; those that hold coefficients are shown at once. */
export function contentFields(layout: LayoutDocument): ContentField[] {
  return layout.fields.map(({ name, unit, value }) => ({
    name,
    unit: decodedNumber(0, unit === "1" ? null : unit, "from" in value ? value.from : null).unit,
    shown: "from" in value && value.from.startsWith("coefficients."),
  }));
}
