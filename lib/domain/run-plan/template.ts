import { plannedReadings, type RunPlan } from "./run-plan";

/** Columns of the readings CSV (contract, section 2), those that the plan fills first. */
const PLANNED = ["serial", "point", "position", "load_kg"] as const;
const MEASURED = ["chamber_c", "soak_min", "device_temp", "signal_mv_v", "taken_at", "dwell_s", "hardware_id"] as const;

/** A text with what a comma-separated file would misread put in quotation marks. */
const quote = (text: string) => (/[",\r\n]/.test(text) ? `"${text.replaceAll('"', '""')}"` : text);

/**
 * The readings CSV of a plan with what is planned filled in and what is measured left empty, rows in working order. Loads
 * stand as planned: whoever reads puts the true ones there.
 */
export function planTemplate(plan: RunPlan): string {
  const measured: readonly string[] = plan.purpose === "proof" ? [...MEASURED, "output_mv_v"] : MEASURED;
  const empty = ",".repeat(measured.length);
  const lines = [[...PLANNED, ...measured].join(",")];
  for (const { serial, point, position, loadKg } of plannedReadings(plan))
    lines.push(`${serial},${point},${quote(position)},${loadKg}${empty}`);
  return `${lines.join("\n")}\n`;
}
