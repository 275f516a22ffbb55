import { formatNumberOf } from "@/lib/domain/format/figure";
import { devices, EVIDENCE_MAX, type PackageCheck } from "./check";

/** The readers that every HEX file is read with: a package of others, and our own strict one. */
export const HEX_READERS = ["intel-hex", "strict"] as const;

/** A HEX file that a reader reads otherwise. */
export interface HexFault {
  serial: string;
  reader: (typeof HEX_READERS)[number];
  /** First byte that differs, or null where the file could not be read. */
  at: number | null;
  reason: string;
}

/** Whether the HEX files give readers that share no code with the writer the bytes of the images. */
export function checkHexReading(facts: {
  devices: number;
  faults: readonly HexFault[];
  /** All of them; only some are named. */
  faultCount: number;
}): PackageCheck {
  const { faults, faultCount } = facts;
  const [first] = faults;
  return {
    code: "hex-reading",
    verdict: first ? "fail" : "pass",
    message: first
      ? `${formatNumberOf(faultCount, "HEX file reads", "HEX files read")} otherwise than the image: ${first.serial}: ${first.reason} (${first.reader} reader).`
      : `An independent reader and a strict one read the HEX files of ${devices(facts.devices)} to the very bytes of their images.`,
    evidence: {
      devices: facts.devices,
      readers: [...HEX_READERS],
      faults: { count: faultCount, items: faults.slice(0, EVIDENCE_MAX) },
    },
  };
}
