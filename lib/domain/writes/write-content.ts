import { canonicalJson } from "@/lib/domain/canonical-json";
import type { WriteReport } from "@/schemas/api/stations";

/**
 * What makes two reports the same: the RFC 8785 form of all their members, a missing one taken as null and times in
 * milliseconds, so that a station that sends its journal again may spell them in another way.
 */
export function writeContent(report: WriteReport): string {
  const time = (text: string) => new Date(text).toISOString();
  return canonicalJson({
    id: report.id.toLowerCase(),
    counter: report.counter,
    serial: report.serial,
    package: report.package,
    imageSha256: report.imageSha256,
    result: report.result,
    readbackSha256: report.readbackSha256,
    serialBefore: report.serialBefore ?? null,
    hardwareId: report.hardwareId ?? null,
    firmware: report.firmware ?? null,
    zeroMvV: report.zeroMvV ?? null,
    deviceTemp: report.deviceTemp ?? null,
    startedAt: time(report.startedAt),
    finishedAt: time(report.finishedAt),
    operator: report.operator,
    detail: report.detail ?? null,
  });
}
