import { createHash } from "node:crypto";
import type { Trx } from "@/db/executor";
import * as query from "@/db/queries/writes";
import { canonicalJson } from "@/lib/domain/canonical-json";
import { flagsOf, type KnownTarget, outcomeOf } from "@/lib/domain/writes/judge-write";
import type { StationCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import type { FamilyDocument } from "@/schemas/api/families";
import type { WriteReport } from "@/schemas/api/stations";

export interface WriteResult {
  id: string;
  outcome: query.WriteOutcome | "duplicate" | "conflict";
  flags: string[];
}

const UUID = /^[0-9a-f-]{36}$/;
const isPackageId = (text: string) => UUID.test(text);

/**
 * Records what a station reports. Nothing is dropped: a write of a package that is not live, of an unknown serial or of other bytes
 * is kept and flagged. The same record sent again is `duplicate`; the same id with other content is `conflict` and changes nothing.
 * One ledger event stands for the batch, with the number of records and the SHA-256 over their digests.
 */
export async function recordWrites(
  ctx: StationCtx,
  writes: readonly WriteReport[],
): Promise<{ results: WriteResult[] }> {
  return ctx.db.transaction().execute(async (trx) => {
    const hashed = writes.map((report) => ({
      report,
      contentSha256: createHash("sha256").update(canonicalJson(report)).digest(),
    }));
    const firstOfId = new Map<string, Buffer>();
    for (const row of await query.listKnownWrites(
      trx,
      writes.map((report) => report.id),
    ))
      firstOfId.set(row.id, row.contentSha256);
    const fresh = hashed.filter(({ report, contentSha256 }) => {
      if (firstOfId.has(report.id)) return false;
      firstOfId.set(report.id, contentSha256);
      return true;
    });
    const rows = await judge(ctx, trx, fresh);
    const stored = new Set(await query.insertWrites(trx, rows));
    // Another request of the same station may have stored the same id between our look and our insert.
    for (const row of await query.listKnownWrites(
      trx,
      rows.filter((row) => !stored.has(row.id)).map((row) => row.id),
    )) {
      firstOfId.set(row.id, row.contentSha256);
    }
    await query.setFirstHardware(
      trx,
      rows.flatMap(({ deviceId, hardwareId, outcome, flags }) =>
        deviceId && hardwareId && outcome === "verified" && !flags.includes("board-changed")
          ? [{ deviceId, hardwareId }]
          : [],
      ),
    );
    const results = resultsOf(hashed, rows, stored, firstOfId);
    const conflicts = results.filter((result) => result.outcome === "conflict").map((result) => result.id);
    if (stored.size > 0 || conflicts.length > 0) {
      const root = createHash("sha256").update(
        Buffer.concat(rows.filter((row) => stored.has(row.id)).map((row) => row.contentSha256)),
      );
      await appendEvent(ctx, trx, {
        action: "writes.recorded",
        subject: ctx.actor.id,
        data: { count: stored.size, root: root.digest("hex"), ...(conflicts.length > 0 && { conflicts }) },
      });
    }
    return { results };
  });
}

function resultsOf(
  hashed: readonly { report: WriteReport; contentSha256: Buffer }[],
  rows: readonly query.WriteRow[],
  stored: Set<string>,
  firstOfId: Map<string, Buffer>,
): WriteResult[] {
  const rowOfId = new Map(rows.map((row) => [row.id, row]));
  const answered = new Set<string>();
  return hashed.map(({ report: { id }, contentSha256 }) => {
    const row = rowOfId.get(id);
    if (row && stored.has(id) && !answered.has(id)) {
      answered.add(id);
      return { id, outcome: row.outcome, flags: row.flags };
    }
    return { id, outcome: firstOfId.get(id)?.equals(contentSha256) ? "duplicate" : "conflict", flags: [] };
  });
}

async function judge(
  ctx: StationCtx,
  trx: Trx,
  fresh: readonly { report: WriteReport; contentSha256: Buffer }[],
): Promise<query.WriteRow[]> {
  const serials = [...new Set(fresh.map(({ report }) => report.serial))];
  const packageIds = [...new Set(fresh.map(({ report }) => report.package).filter(isPackageId))];
  const targets = new Map((await query.listWriteTargets(trx, serials)).map((target) => [target.serial, target]));
  const images = new Map(
    (await query.listWriteImages(trx, packageIds, serials)).map((image) => [
      `${image.packageId} ${image.serial}`,
      image,
    ]),
  );
  const starts = await query.listLiveStarts(trx, [...new Set([...images.values()].map((image) => image.lotId))]);
  const receivedAt = ctx.now();
  return fresh.map(({ report, contentSha256 }) => {
    const target = targets.get(report.serial);
    const image = images.get(`${report.package} ${report.serial}`);
    const write = { ...report, finishedAt: new Date(report.finishedAt) };
    const known: KnownTarget = {
      device: target && {
        hardwareId: target.hardwareId,
        held: target.held,
        stationMayWrite: ctx.actor.familyIds.includes(target.familyId),
      },
      image: image && knownImage(image),
      liveWhenFinished: image !== undefined && liveAt(starts, image.lotId, write.finishedAt) === report.package,
    };
    return {
      id: report.id,
      stationId: ctx.actor.id,
      counter: report.counter,
      serial: report.serial,
      deviceId: target?.deviceId ?? null,
      packageId: image ? report.package : null,
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
      finishedAt: write.finishedAt,
      operator: report.operator,
      detail: report.detail ?? null,
      outcome: outcomeOf(write, known),
      flags: flagsOf(write, known, receivedAt),
      contentSha256,
      receivedAt,
    };
  });
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
function liveAt(starts: Awaited<ReturnType<typeof query.listLiveStarts>>, lotId: string, at: Date): string | null {
  const last = starts.filter((start) => start.lotId === lotId && start.startedAt <= at).at(-1);
  return last === undefined || last.kind === "withdrawal" ? null : last.packageId;
}
