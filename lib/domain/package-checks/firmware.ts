import { isFirmwareOf } from "@/lib/domain/firmware-range";
import { devices, EVIDENCE_MAX, type PackageCheck, someSerials } from "./check";

export interface FirmwareFacts {
  /** The lot's. */
  firmware: string;
  /** Range that the layout is for. */
  range: string;
  packed: number;
  /** Packed devices that are known to run another firmware than the lot's. */
  others: readonly { serial: string; firmware: string }[];
}

/** Whether the firmware of the lot and of every device it is known of understands the layout. */
export function checkFirmware({ firmware, range, packed, others }: FirmwareFacts): PackageCheck {
  const lotFits = isFirmwareOf(firmware, range);
  const outside = others.filter((one) => !isFirmwareOf(one.firmware, range));
  const lot = `The layout is for firmware ${range}; the lot runs ${firmware}`;
  const sentences = [lotFits ? `${lot}.` : `${lot}, which would misread it.`];
  if (outside.length > 0)
    sentences.push(
      `${devices(outside.length)} are known to run firmware that it is not for (${someSerials(outside.map((one) => one.serial))}).`,
    );
  else if (others.length > 0)
    sentences.push(`${devices(others.length)} are known to run another firmware, which it is for too.`);
  return {
    code: "firmware",
    verdict: !lotFits ? "fail" : outside.length > 0 ? "warn" : "pass",
    message: sentences.join(" "),
    evidence: {
      firmware,
      range,
      devices: packed,
      others: others.length,
      outside: { count: outside.length, items: outside.slice(0, EVIDENCE_MAX) },
    },
  };
}
