import { Facts } from "@/app/_components/facts";
import { formatCount, formatFigure, formatNumberOf } from "@/lib/domain/format/figure";
import { toEngineering } from "@/lib/domain/format/quantity";
import type { ChangeCounts, FieldSummary } from "@/schemas/api/compare";

export interface ComparisonFactsProps {
  counts: ChangeCounts;
  /** Changed fields that are no version numbers or checksums, with the step of one stored integer where there is one. */
  fields: readonly (FieldSummary & { scale: number | null })[];
}

/** What differs between two packages in a few figures. */
export function ComparisonFacts({ counts, fields }: ComparisonFactsProps) {
  const total = counts.values + counts["version-only"] + counts.same + counts.added;
  return (
    <div className="flex flex-col gap-3">
      <Facts
        facts={[
          { value: formatCount(counts.values), label: `of ${formatNumberOf(total, "device")} get other values` },
          {
            value: formatCount(fields.length),
            label:
              fields.length > 0 ? `parameters: ${fields.map((field) => field.name).join(", ")}` : "parameters differ",
          },
          { value: formatCount(counts["version-only"]), label: "differ in version numbers only" },
          { value: formatCount(counts.added + counts.removed), label: addedText(counts) },
          ...(counts.same > 0 ? [{ value: formatCount(counts.same), label: "have the same bytes" }] : []),
        ]}
      />
      {fields.length > 0 ? (
        <ul className="flex flex-wrap gap-x-6 gap-y-1 text-sm">
          {fields.map((field) => (
            <li key={field.name}>
              <span className="font-semibold">{field.name}</span> {stepText(field)}
            </li>
          ))}
        </ul>
      ) : null}
    </div>
  );
}

function addedText({ added, removed }: ChangeCounts): string {
  if (added + removed === 0) return "serials added or removed";
  return `serials: ${formatCount(added)} added, ${formatCount(removed)} removed`;
}

/** "−160,000 steps (−0.16 ppm/K), all devices alike", or from which step to which. */
function stepText({ unit, stepsMin, stepsMax, scale, devices }: ComparisonFactsProps["fields"][number]): string {
  const who = formatNumberOf(devices, "device");
  if (stepsMin === null || stepsMax === null) return `in ${who}`;
  const steps = (value: number) => formatFigure(value, { digits: 0, sign: "always", group: true });
  if (stepsMin === stepsMax) return `${steps(stepsMin)} steps${inUnit(stepsMin, scale, unit)}, ${who} alike`;
  return `${steps(stepsMin)} to ${steps(stepsMax)} steps${inUnit(stepsMin, scale, unit, stepsMax)}, ${who}`;
}

function inUnit(steps: number, scale: number | null, unit: string | null, to?: number): string {
  if (scale === null || unit === null) return "";
  const shown = (value: number) =>
    unit === "1" ? { value: value * scale * 1e6, unit: "ppm" } : toEngineering(value * scale, unit);
  const figure = (value: number) => formatFigure(shown(value).value, { digits: 3, sign: "always" });
  return ` (${figure(steps)}${to === undefined ? "" : ` to ${figure(to)}`} ${shown(0).unit})`;
}
