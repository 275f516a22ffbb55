import type { DerivationResult, DeviceResult, Finding } from "@/lib/domain/compensation/types";
import type { DerivationPreview, DerivedDevice } from "@/schemas/api/derivations";
import { countResult, detailOf, listAllFindings } from "./compute";
import type { DerivationPlan } from "./derivation-input";
import { deviceViewOf } from "./device-view";

/** How many findings and devices a reply carries itself. */
export const SHOWN_MAX = 1000;

/** What a derivation would give, as it would be shown. */
export function previewOf(
  { lot, revision, options }: DerivationPlan,
  sha256: string,
  result: DerivationResult,
  newId: () => string,
): DerivationPreview {
  const counts = countResult(result);
  const withId = (finding: Finding) => ({ ...finding, id: newId() });
  const viewOf = (device: DeviceResult): DerivedDevice =>
    deviceViewOf(
      {
        serial: device.serial,
        role: device.role,
        state: device.coefficients ? "proposed" : null,
        coefficients: device.coefficients,
        detail: detailOf(device),
      },
      device.findings.map(withId),
    );
  return {
    preview: true,
    lot: lot.code,
    family: lot.familyCode,
    revision: revision.number,
    sha256,
    engine: result.engine,
    method: options.method,
    order: options.order,
    provenRange: result.provenRange,
    ...(result.pooled && { pooled: result.pooled }),
    counts: { ...counts, states: counts.withValues > 0 ? { proposed: counts.withValues } : {} },
    findings: listAllFindings(result).slice(0, SHOWN_MAX).map(withId),
    verification: result.verification,
    envelope: result.envelope ?? null,
    uncertainty: result.uncertainty ?? null,
    devices: result.devices.slice(0, SHOWN_MAX).map(viewOf),
  };
}
