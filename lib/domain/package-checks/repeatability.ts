import { formatNumberOf } from "@/lib/domain/format/figure";
import { devices, type PackageCheck, serialEvidence, someSerials } from "./check";

export interface RepeatabilityFacts {
  devices: number;
  /** Package digests of the build and of the one after it, lower-case hex. */
  digest: string;
  repeated: string;
  /** Serials whose image or HEX came out otherwise. */
  differing: readonly string[];
}

/** Whether the same inputs, read and composed once more, gave the same bytes. */
export function checkRepeatability({ devices: packed, digest, repeated, differing }: RepeatabilityFacts): PackageCheck {
  const same = digest === repeated && differing.length === 0;
  return {
    code: "repeatability",
    verdict: same ? "pass" : "fail",
    message: same
      ? `Composed twice, ${devices(packed)} gave the same bytes and the same package digest.`
      : `Composed twice, the package came out otherwise${differing.length > 0 ? `: ${formatNumberOf(differing.length, "image")} (${someSerials(differing)})` : ""}.`,
    evidence: { devices: packed, digest, repeated, differing: serialEvidence(differing) },
  };
}
