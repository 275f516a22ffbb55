import type { Db } from "@/db/executor";
import type { DerivationCounts } from "@/db/queries/derivations";
import { listRunEquipment, listRunFindings } from "@/db/queries/runs";
import { derive } from "@/lib/domain/compensation/derive";
import { surveyEnvelope } from "@/lib/domain/compensation/survey-envelope";
import type { DerivationInput, DerivationResult, DeviceResult, Finding } from "@/lib/domain/compensation/types";
import { uncertaintyBudget } from "@/lib/domain/compensation/uncertainty/budget";

/** Findings of a run that the arithmetic can't make anew: they rest on certificates and plans of the day of the upload. */
const STANDING = ["equipment.", "plan.", "chamber.off_set_point"];

/** The result of a derivation with what its runs' equipment has to say, its uncertainty budget, and its survey of the envelope. */
export async function compute(db: Db, input: DerivationInput): Promise<DerivationResult> {
  const result = derive(input);
  const replaced = new Set(input.runs.map((run) => run.supersedes));
  const used = input.runs.filter((run) => run.purpose !== "proof" && !replaced.has(run.id)).map((run) => run.id);
  const standing = (await listRunFindings(db, used))
    .filter(({ code }) => STANDING.some((start) => code.startsWith(start)))
    .map(({ id, runId, ...finding }): Finding => ({ ...finding, data: { ...finding.data, run: runId } }));
  const uncertainty = uncertaintyBudget(input, result, await listRunEquipment(db, used));
  const envelope = surveyEnvelope(result.devices, input.family, result.provenRange);
  return { ...result, findings: [...result.findings, ...standing], uncertainty, envelope };
}

/** Everything of a device's result that is not kept in columns of its own or as findings. */
export type DeviceDetail = Omit<DeviceResult, "serial" | "role" | "coefficients" | "findings">;

/** What is kept beside a device's values. */
export function detailOf({ serial, role, coefficients, findings, ...detail }: DeviceResult): DeviceDetail {
  return detail;
}

/** All findings of a result: of the lot first, then device by device. */
export function listAllFindings({ findings, devices }: DerivationResult): Finding[] {
  return [...findings, ...devices.flatMap((device) => device.findings)];
}

/** Devices by role and findings by severity. */
export function countResult(result: DerivationResult): Required<DerivationCounts> {
  const roles: Record<string, number> = {};
  for (const { role } of result.devices) roles[role] = (roles[role] ?? 0) + 1;
  const findings = { hard: 0, soft: 0, note: 0 };
  for (const { severity } of listAllFindings(result)) findings[severity]++;
  const withValues = result.devices.filter((device) => device.coefficients !== null).length;
  return { devices: result.devices.length, withValues, roles, findings };
}
