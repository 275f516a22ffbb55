import type { SetRow } from "@/db/queries/coefficients";
import type { DerivedDevice } from "@/schemas/api/derivations";
import type { FindingView } from "@/schemas/api/runs";
import type { DeviceDetail } from "./compute";

/** A device of a derivation as replies show it. Imported values have no readings, and so neither residuals nor errors. */
export function deviceViewOf(
  set: Pick<SetRow, "serial" | "role" | "state" | "coefficients" | "detail">,
  findings: FindingView[],
): DerivedDevice {
  const detail = set.detail as Partial<DeviceDetail>;
  return {
    serial: set.serial,
    role: set.role,
    state: set.state,
    coefficients: set.coefficients,
    individual: detail.individual ?? null,
    residuals: detail.residuals ?? null,
    uncertainty: detail.uncertainty ?? null,
    gainFrom: detail.gainFrom ?? null,
    spanErrorPpm: detail.spanErrorPpm ?? null,
    spanRatio: detail.spanRatio ?? null,
    zeroShiftRatio: detail.zeroShiftRatio ?? null,
    measuredRangeC: detail.measuredRangeC ?? null,
    findings,
  };
}
