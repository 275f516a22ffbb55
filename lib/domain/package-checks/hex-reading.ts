import { formatNumberOf } from "@/lib/domain/format/figure";
import { devices, EVIDENCE_MAX, type PackageCheck } from "./check";

/** A HEX file that another reader reads otherwise. */
export interface HexFault {
  serial: string;
  /** First byte that differs, or null where the file could not be read. */
  at: number | null;
  reason: string;
}

/** Whether the HEX files give a reader that is not ours the bytes of the images. */
export function checkHexReading(facts: { devices: number; faults: readonly HexFault[] }): PackageCheck {
  const { faults } = facts;
  const [first] = faults;
  return {
    code: "hex-reading",
    verdict: first ? "fail" : "pass",
    message: first
      ? `${formatNumberOf(faults.length, "HEX file reads", "HEX files read")} otherwise than the image: ${first.serial}: ${first.reason}.`
      : `An independent reader reads the HEX files of ${devices(facts.devices)} to the very bytes of their images.`,
    evidence: {
      devices: facts.devices,
      reader: "intel-hex",
      faults: { count: faults.length, items: faults.slice(0, EVIDENCE_MAX) },
    },
  };
}
