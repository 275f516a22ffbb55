import type { Trx } from "@/db/executor";
import * as query from "@/db/queries/writes";
import { flagsOf, type KnownTarget, outcomeOf } from "@/lib/domain/writes/judge-write";
import type { StationCtx } from "@/lib/services/context";
import type { FamilyDocument } from "@/schemas/api/families";
import type { WriteReport } from "@/schemas/api/stations";

/** A report with the SHA-256 of its content; ids are in lower case from here on. */
export interface HashedReport {
  report: WriteReport;
  contentSha256: Buffer;
}

const UUID = /^[0-9a-f]{8}-[0-9a-f]{4}-[0-9a-f]{4}-[0-9a-f]{4}-[0-9a-f]{12}$/;
const packageIdOf = (report: WriteReport): string => report.package.trim().toLowerCase();

interface Known {
  targets: Map<string, query.WriteTarget>;
  images: Map<string, query.WriteImage>;
  starts: Awaited<ReturnType<typeof query.listLiveStarts>>;
}

/** Rows to be stored for new reports, each with its outcome and flags. Nothing is refused here: what is odd is flagged. */
export async function judgeWrites(
  ctx: StationCtx,
  trx: Trx,
  reports: readonly HashedReport[],
): Promise<query.WriteRow[]> {
  const known = await lookUp(trx, reports);
  const receivedAt = ctx.now();
  return reports.map(({ report, contentSha256 }) => {
    const target = known.targets.get(report.serial);
    const image = known.images.get(`${packageIdOf(report)} ${report.serial}`);
    const write = { ...report, finishedAt: new Date(report.finishedAt) };
    const facts = knownTarget(ctx, known, { target, image, at: write.finishedAt });
    const row = {
      ...storedFacts(report),
      stationId: ctx.actor.id,
      deviceId: target?.deviceId ?? null,
      packageId: image?.packageId ?? null,
      outcome: outcomeOf(write, facts),
      flags: flagsOf(write, facts, receivedAt),
      contentSha256,
      receivedAt,
    };
    // The first verified write tells the board of a device; later ones of the same upload are held against it.
    if (target && isFirstBoard(row)) target.hardwareId ??= row.hardwareId;
    return row;
  });
}

/** Whether a record tells which board a device has, where that was not known. */
export function isFirstBoard(row: Pick<query.WriteRow, "hardwareId" | "outcome" | "flags">): boolean {
  return row.hardwareId !== null && row.outcome === "verified" && !row.flags.includes("board-changed");
}

async function lookUp(trx: Trx, reports: readonly HashedReport[]): Promise<Known> {
  const serials = [...new Set(reports.map(({ report }) => report.serial))];
  const packageIds = [...new Set(reports.map(({ report }) => packageIdOf(report)).filter((id) => UUID.test(id)))];
  const targets = await query.lockWriteTargets(trx, serials);
  const images = await query.listWriteImages(trx, packageIds, serials);
  const lotIds = [...new Set(images.map((image) => image.lotId))];
  return {
    targets: new Map(targets.map((target) => [target.serial, target])),
    images: new Map(images.map((image) => [`${image.packageId} ${image.serial}`, image])),
    starts: await query.listLiveStarts(trx, lotIds),
  };
}

function knownTarget(
  ctx: StationCtx,
  { starts }: Known,
  { target, image, at }: { target?: query.WriteTarget; image?: query.WriteImage; at: Date },
): KnownTarget {
  return {
    device: target && {
      hardwareId: target.hardwareId,
      held: target.held,
      scrapped: target.scrapped,
      stationMayWrite: ctx.actor.familyIds.includes(target.familyId),
    },
    image: image && knownImage(image),
    liveWhenFinished: image !== undefined && liveAt(starts, image.lotId, at) === image.packageId,
  };
}

function storedFacts(report: WriteReport) {
  return {
    id: report.id,
    counter: report.counter,
    serial: report.serial,
    packageReported: report.package,
    imageSha256: Buffer.from(report.imageSha256, "hex"),
    result: report.result,
    readbackSha256: report.readbackSha256 === null ? null : Buffer.from(report.readbackSha256, "hex"),
    serialBefore: report.serialBefore ?? null,
    hardwareId: report.hardwareId ?? null,
    firmware: report.firmware ?? null,
    zeroMvV: report.zeroMvV ?? null,
    deviceTemp: report.deviceTemp ?? null,
    startedAt: new Date(report.startedAt),
    finishedAt: new Date(report.finishedAt),
    operator: report.operator,
    detail: report.detail ?? null,
  };
}

function knownImage(image: query.WriteImage): NonNullable<KnownTarget["image"]> {
  const family = image.familyDocument as FamilyDocument;
  const { zero, zeroTc, zeroTc2, tempOffset, tempSlope } = image;
  const known = zero !== null && zeroTc !== null && tempOffset !== null && tempSlope !== null;
  const zeroMvV = (deviceTemp: number) => {
    const d = (tempOffset as number) + (tempSlope as number) * deviceTemp - family.referenceC;
    return (zero as number) + (zeroTc as number) * d + (zeroTc2 ?? 0) * d * d;
  };
  return {
    sha256: image.sha256.toString("hex"),
    hardwareId: image.hardwareId,
    firmware: image.firmware,
    nominalMvV: family.nominalMvV,
    zeroMvV: known ? zeroMvV : null,
  };
}

/** Id of the package that was live for the lot at that moment, null where none was. */
function liveAt(starts: Known["starts"], lotId: string, at: Date): string | null {
  const last = starts.filter((start) => start.lotId === lotId && start.startedAt <= at).at(-1);
  return last === undefined || last.kind === "withdrawal" ? null : last.packageId;
}
