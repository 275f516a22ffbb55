import { compare, valid } from "semver";

/** What is known about the device and the image that a station says it wrote. Digests as lower-case hex. */
export interface KnownTarget {
  /** Undefined where no device has the serial. */
  device?: { hardwareId: string | null; held: boolean; scrapped: boolean; stationMayWrite: boolean };
  /** Undefined where the package has no image of the device. */
  image?: {
    sha256: string;
    hardwareId: string | null;
    firmware: string;
    zeroMvV: ((deviceTemp: number) => number) | null;
    nominalMvV: number;
  };
  /** Whether the package was live when the write finished. */
  liveWhenFinished: boolean;
}

export interface ReportedWrite {
  serial: string;
  imageSha256: string;
  result: "written" | "failed" | "interrupted";
  readbackSha256: string | null;
  serialBefore?: string | null;
  hardwareId?: string | null;
  firmware?: string | null;
  zeroMvV?: number | null;
  deviceTemp?: number | null;
  finishedAt: Date;
}

export type Outcome = "verified" | "mismatch" | "failed" | "interrupted" | "unknown-image" | "unknown-serial";

/** A record that arrives later than this after the write is flagged `late`: its station may have missed a stop. */
export const LATE_AFTER_MS = 60 * 60 * 1000;
/** A station's clock may be this far ahead before its records are flagged. */
const CLOCK_AHEAD_MS = 5 * 60 * 1000;
/**
 * The unloaded signal on the fixture may differ from the device's own zero curve by this share of nominal output
 * (common practice, no source: fixtures carry a small dead load; another cell's zero differs by more).
 */
const ZERO_SHARE = 0.01;

/** The one word for what the report means: nothing is called verified unless the bytes read back are the image's. */
export function outcomeOf(write: ReportedWrite, known: KnownTarget): Outcome {
  if (!known.device) return "unknown-serial";
  if (!known.image || known.image.sha256 !== write.imageSha256) return "unknown-image";
  if (write.result !== "written") return write.result;
  return write.readbackSha256 === known.image.sha256 ? "verified" : "mismatch";
}

/** What a person should look at although the record stands; in a fixed order. */
export function flagsOf(write: ReportedWrite, known: KnownTarget, receivedAt: Date): string[] {
  const { device, image } = known;
  const before = write.serialBefore?.trim().toUpperCase() ?? "";
  const board = image?.hardwareId ?? device?.hardwareId ?? null;
  const zero =
    image?.zeroMvV && write.deviceTemp != null && write.zeroMvV != null ? image.zeroMvV(write.deviceTemp) : null;
  const tests: [string, boolean][] = [
    ["not-live", !known.liveWhenFinished],
    ["late", receivedAt.getTime() - write.finishedAt.getTime() > LATE_AFTER_MS],
    ["clock-ahead", write.finishedAt.getTime() - receivedAt.getTime() > CLOCK_AHEAD_MS],
    ["held", device?.held === true],
    ["scrapped", device?.scrapped === true],
    ["station-not-allowed", device !== undefined && !device.stationMayWrite],
    ["serial-differs", before !== "" && before !== write.serial],
    ["board-changed", write.hardwareId != null && board !== null && write.hardwareId !== board],
    [
      "firmware-differs",
      image !== undefined && write.firmware != null && !sameFirmware(write.firmware, image.firmware),
    ],
    [
      "zero-off",
      zero !== null &&
        image !== undefined &&
        Math.abs((write.zeroMvV as number) - zero) > ZERO_SHARE * image.nominalMvV,
    ],
    ["no-readback", write.result === "written" && write.readbackSha256 === null],
  ];
  return tests.filter(([, applies]) => applies).map(([flag]) => flag);
}

function sameFirmware(reported: string, ofLot: string): boolean {
  return valid(reported) !== null && valid(ofLot) !== null ? compare(reported, ofLot) === 0 : reported === ofLot;
}
