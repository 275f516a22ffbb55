import type { SheetCell } from "@/builders/spreadsheet/write-xlsx";
import type { Severity } from "@/lib/domain/compensation/types";
import { STORED_UNITS } from "@/lib/domain/format/coefficient-units";
import { COEFFICIENT_QUANTITIES } from "@/lib/domain/format/quantity";
import type { DerivedDevice } from "@/schemas/api/derivations";

/** One column of the table of devices as it leaves the product: stored units, full precision. */
export interface DeviceColumn {
  /** With its unit. */
  heading: string;
  cell: (device: DerivedDevice) => SheetCell;
}

type Uncertainty = keyof NonNullable<DerivedDevice["uncertainty"]>;

const uncertainty = (heading: string, name: Uncertainty): DeviceColumn => ({
  heading,
  cell: (device) => device.uncertainty?.[name] ?? null,
});

/** Degrees of freedom say nothing about a device without coefficients of its own readings. */
const freedom = (heading: string, name: Uncertainty): DeviceColumn => ({
  heading,
  cell: (device) => (device.coefficients ? (device.uncertainty?.[name] ?? null) : null),
});

const findings = (severity: Severity, heading: string): DeviceColumn => ({
  heading,
  cell: (device) => device.findings.filter((finding) => finding.severity === severity).length,
});

/** @param intervals n of the family: what the error at capacity is stated in. */
export function deviceColumns(intervals: number): DeviceColumn[] {
  return [
    { heading: "serial", cell: (device) => device.serial },
    { heading: "role", cell: (device) => device.role },
    { heading: "state", cell: (device) => device.state },
    ...COEFFICIENT_QUANTITIES.map((name) => ({
      heading: `${name} (${STORED_UNITS[name]})`,
      cell: (device: DerivedDevice) => device.coefficients?.[name] ?? null,
    })),
    { heading: "gain from", cell: (device) => device.gainFrom },
    { heading: "own gain (1)", cell: (device) => device.individual?.gain ?? null },
    { heading: "own gainTc (1/K)", cell: (device) => device.individual?.gainTc ?? null },
    { heading: "own gainTc2 (1/K²)", cell: (device) => device.individual?.gainTc2 ?? null },
    uncertainty("standard error of zero (mV/V)", "zero"),
    uncertainty("standard error of zeroTc (mV/V/K)", "zeroTc"),
    uncertainty("standard error of gain (1)", "gain"),
    uncertainty("standard error of gainTc (1/K)", "gainTc"),
    uncertainty("residual deviation of temperature (K)", "residualSdTemperature"),
    uncertainty("residual deviation of zero (mV/V)", "residualSdZero"),
    uncertainty("residual deviation of gain (1)", "residualSdGain"),
    freedom("degrees of freedom of temperature", "degreesOfFreedomTemperature"),
    freedom("degrees of freedom of zero", "degreesOfFreedomZero"),
    freedom("degrees of freedom of gain", "degreesOfFreedomGain"),
    { heading: "span error (ppm)", cell: (device) => device.spanErrorPpm },
    {
      heading: `error at ${intervals} intervals (v)`,
      cell: ({ spanErrorPpm }) => (spanErrorPpm === null ? null : (spanErrorPpm * intervals) / 1e6),
    },
    { heading: "span as share of the envelope (1)", cell: (device) => device.spanRatio },
    { heading: "zero shift as share of the limit (1)", cell: (device) => device.zeroShiftRatio },
    { heading: "measured from (°C)", cell: (device) => device.measuredRangeC?.[0] ?? null },
    { heading: "measured to (°C)", cell: (device) => device.measuredRangeC?.[1] ?? null },
    findings("hard", "blocking findings"),
    findings("soft", "findings to acknowledge"),
    findings("note", "notes"),
    { heading: "codes of findings", cell: (device) => [...new Set(device.findings.map((one) => one.code))].join("; ") },
  ];
}
