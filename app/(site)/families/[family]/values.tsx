import { formatCount } from "@/lib/domain/format/figure";
import { thresholdsOf } from "@/lib/domain/package-checks/thresholds";
import { familyFieldGroups, thresholdFields } from "../family-fields";

type Values = Record<string, unknown>;

/** The values of a document as rows name them; what a revision does not set stands as its default. */
function flat(values: Values): Values {
  return { ...values, ...thresholdsOf(values) };
}

function shown(value: unknown): string {
  if (typeof value !== "number") return value === undefined ? "—" : String(value);
  return Number.isInteger(value) ? formatCount(value) : String(value).replace("-", "−");
}

/** A revision's values with unit and explanation. Against an earlier one, what changed stands old → new. */
export function FamilyValues({ values: given, before: earlier }: { values: Values; before?: Values }) {
  const values = flat(given);
  const before = earlier && flat(earlier);
  const rows = [
    { name: "name", label: "Name", unit: undefined, help: "As people call it." },
    {
      name: "accuracyClass",
      label: "Accuracy class",
      unit: undefined,
      help: "Of OIML R 60; decides the error envelope.",
    },
    ...familyFieldGroups.flatMap((group) => group.fields),
    ...thresholdFields,
  ];
  return (
    <dl className="grid gap-x-8 sm:grid-cols-2">
      {rows.map(({ name, label, unit, help }) => {
        const changed = before !== undefined && before[name] !== values[name];
        return (
          <div key={name} className="border-b border-rule py-2">
            <dt className="flex items-baseline justify-between gap-4 text-sm font-semibold">
              {label}
              {changed ? <span className="text-xs font-semibold text-ochre">changed</span> : null}
            </dt>
            <dd>
              <span className={name === "name" ? "" : "font-mono"}>
                {changed ? <span className="text-ink-soft">{shown(before[name])} → </span> : null}
                {shown(values[name])}
              </span>
              {unit ? <span className="text-ink-soft"> {unit}</span> : null}
              <span className="block text-xs text-ink-soft">{help}</span>
            </dd>
          </div>
        );
      })}
    </dl>
  );
}
