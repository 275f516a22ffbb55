import { toEngineering } from "@/lib/domain/format/quantity";
import type { LayoutDocument } from "@/schemas/documents/layout";
import type { ContentField } from "./contents-table";

/** Fields in the layout's order; those that hold coefficients are shown at once. */
export function contentFields(layout: LayoutDocument): ContentField[] {
  return layout.fields.map(({ name, unit, value }) => ({
    name,
    unit: toEngineering(0, unit === "1" ? null : unit).unit,
    shown: "from" in value && value.from.startsWith("coefficients."),
  }));
}
