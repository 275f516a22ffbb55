import { formatNumberOf } from "@/lib/domain/format/figure";
import { devices, EVIDENCE_MAX, type PackageCheck } from "./check";

/** A byte that belongs to nothing and does not hold the fill. */
export interface ReservedFault {
  serial: string;
  /** Offset in the image. */
  at: number;
  /** What stands there, 0…255. */
  byte: number;
}

export interface ReservedFacts {
  devices: number;
  /** Stretches, inclusive, of no field and no checksum. */
  ranges: readonly (readonly [number, number])[];
  /** 0…255 */
  fill: number;
  faults: readonly ReservedFault[];
  /** All of them; only some are named. */
  faultCount: number;
}

const hexByte = (byte: number) => byte.toString(16).toUpperCase().padStart(2, "0");

/** Whether bytes that no field and no checksum claims were left at the fill. */
export function checkReservedBytes({ ranges, fill, faults, faultCount, ...facts }: ReservedFacts): PackageCheck {
  const bytes = ranges.reduce((sum, [from, to]) => sum + to - from + 1, 0);
  const [first] = faults;
  const message = first
    ? `${formatNumberOf(faultCount, "reserved byte is", "reserved bytes are")} not at the fill ${hexByte(fill)}: offset ${first.at} of ${first.serial} holds ${hexByte(first.byte)}.`
    : bytes === 0
      ? "The layout leaves no byte reserved."
      : `The ${formatNumberOf(bytes, "byte")} that no field claims hold the fill ${hexByte(fill)} in the images of ${devices(facts.devices)}.`;
  return {
    code: "reserved-bytes",
    verdict: first ? "fail" : "pass",
    message,
    evidence: {
      devices: facts.devices,
      bytes,
      fill,
      ranges: ranges.map(([from, to]) => ({ from, to })),
      faults: { count: faultCount, items: faults.slice(0, EVIDENCE_MAX) },
    },
  };
}
