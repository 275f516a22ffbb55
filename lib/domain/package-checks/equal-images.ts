import { formatNumberOf } from "@/lib/domain/format/figure";
import { devices, EVIDENCE_MAX, type PackageCheck, someSerials } from "./check";

export interface EqualImagesFacts {
  devices: number;
  /** Serials whose images differ in nothing but serial and checksums; each group at least two. */
  groups: readonly (readonly string[])[];
}

/** Whether two devices hold the same values: measured ones never do, copied ones would. */
export function checkEqualImages({ devices: packed, groups }: EqualImagesFacts): PackageCheck {
  const [first] = groups;
  return {
    code: "equal-images",
    verdict: first ? "warn" : "pass",
    message: first
      ? `${formatNumberOf(groups.length, "group of devices holds", "groups of devices hold")} the same bytes apart from serial and checksums${groups.length === 1 ? ": " : "; the first is "}${someSerials(first)}.`
      : `No two of ${devices(packed)} hold the same bytes apart from serial and checksums.`,
    evidence: {
      devices: packed,
      groups: {
        count: groups.length,
        items: groups.slice(0, EVIDENCE_MAX).map((serials) => serials.slice(0, EVIDENCE_MAX)),
      },
    },
  };
}
