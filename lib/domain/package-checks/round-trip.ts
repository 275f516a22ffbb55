import { formatCount, formatNumberOf } from "@/lib/domain/format/figure";
import { devices, EVIDENCE_MAX, type PackageCheck } from "./check";

/** One value of one device that does not read back as it was put in. */
export interface RoundTripFault {
  serial: string;
  field: string;
  expected: number | string | null;
  actual: number | string | null;
}

export interface RoundTripFacts {
  devices: number;
  /** Values compared over all devices. */
  values: number;
  /** Checksums computed anew over all devices. */
  checksums: number;
  faults: readonly RoundTripFault[];
  /** Faults beyond those that are named. */
  faultCount: number;
  /** Largest difference of a decoded number from the one given, by field, in the field's unit. */
  largestErrors: readonly { field: string; unit: string | null; error: number; serial: string }[];
}

/** Whether the images, decoded again, hold what the coefficient sets say, as far as the layout's steps can tell it. */
export function checkRoundTrip(facts: RoundTripFacts): PackageCheck {
  const { faults, faultCount, largestErrors } = facts;
  const [first] = faults;
  const read = `${formatCount(facts.values)} values and ${formatNumberOf(facts.checksums, "checksum")} of ${devices(facts.devices)}`;
  const message = first
    ? `${formatNumberOf(faultCount, "value does", "values do")} not read back: ${first.field} of ${first.serial} is ${first.actual}, not ${first.expected}.`
    : `Decoded again, ${read} are what was put in, to the layout's steps.`;
  return {
    code: "round-trip",
    verdict: first ? "fail" : "pass",
    message,
    evidence: {
      devices: facts.devices,
      values: facts.values,
      checksums: facts.checksums,
      faults: { count: faultCount, items: faults.slice(0, EVIDENCE_MAX) },
      largestErrors,
    },
  };
}
