import { createHash } from "node:crypto";
import type { Trx } from "@/db/executor";
import * as query from "@/db/queries/writes";
import { writeContent } from "@/lib/domain/writes/write-content";
import type { StationCtx } from "@/lib/services/context";
import { appendEvent } from "@/lib/services/ledger/append-event";
import type { WriteReport } from "@/schemas/api/stations";
import { type HashedReport, isFirstBoard, judgeWrites } from "./judge-writes";

export interface WriteResult {
  id: string;
  outcome: query.WriteOutcome | "duplicate" | "conflict";
  flags: string[];
}

/** Who stored an id first, and with what content. */
type FirstOfId = Map<string, { stationId: string; contentSha256: Buffer }>;

/**
 * Records what a station reports. Nothing is dropped: a write of a package that is not live, of an unknown serial or of other bytes
 * is kept and flagged. The same record sent again is `duplicate`; the same id with other content is `conflict` and changes nothing.
 * One ledger event stands for the batch, with the number of records and the SHA-256 over their digests.
 */
export async function recordWrites(
  ctx: StationCtx,
  writes: readonly WriteReport[],
): Promise<{ results: WriteResult[] }> {
  const hashed = writes.map(hashReport);
  return ctx.db.transaction().execute(async (trx) => {
    await query.lockStationUploads(trx, ctx.actor.id);
    const first: FirstOfId = new Map();
    await addKnown(trx, first, hashed);
    const rows = await judgeWrites(ctx, trx, takeFresh(ctx, hashed, first));
    const stored = new Set(await query.insertWrites(trx, rows));
    // Another station may have stored one of these ids between our look and our insert.
    await addKnown(
      trx,
      first,
      hashed.filter(({ report }) => rows.some((row) => row.id === report.id) && !stored.has(report.id)),
    );
    const kept = rows.filter((row) => stored.has(row.id));
    await query.setFirstHardware(trx, firstBoards(kept));
    const results = resultsOf(ctx, hashed, kept, first);
    await note(ctx, trx, kept, results);
    return { results: results.map((result, i) => ({ ...result, id: writes[i]?.id ?? result.id })) };
  });
}

function hashReport(given: WriteReport): HashedReport {
  const report = { ...given, id: given.id.toLowerCase() };
  return { report, contentSha256: createHash("sha256").update(writeContent(report)).digest() };
}

async function addKnown(trx: Trx, first: FirstOfId, hashed: readonly HashedReport[]): Promise<void> {
  const ids = hashed.map(({ report }) => report.id);
  for (const row of await query.listKnownWrites(trx, ids)) first.set(row.id, row);
}

/** Reports whose id nobody used, the first of each in this upload; they count as known from here on. */
function takeFresh(ctx: StationCtx, hashed: readonly HashedReport[], first: FirstOfId): HashedReport[] {
  return hashed.filter(({ report, contentSha256 }) => {
    if (first.has(report.id)) return false;
    first.set(report.id, { stationId: ctx.actor.id, contentSha256 });
    return true;
  });
}

/** The board of each device as its first verified record of the upload tells it. */
function firstBoards(rows: readonly query.WriteRow[]): { deviceId: string; hardwareId: string }[] {
  const boards = new Map<string, string>();
  for (const { deviceId, hardwareId, ...row } of rows) {
    if (deviceId && hardwareId && isFirstBoard({ hardwareId, ...row }) && !boards.has(deviceId))
      boards.set(deviceId, hardwareId);
  }
  return [...boards].map(([deviceId, hardwareId]) => ({ deviceId, hardwareId }));
}

function resultsOf(
  ctx: StationCtx,
  hashed: readonly HashedReport[],
  kept: readonly query.WriteRow[],
  first: FirstOfId,
): WriteResult[] {
  const unanswered = new Map(kept.map((row) => [row.id, row]));
  return hashed.map(({ report: { id }, contentSha256 }) => {
    const row = unanswered.get(id);
    if (row) {
      unanswered.delete(id);
      return { id, outcome: row.outcome, flags: row.flags };
    }
    const before = first.get(id);
    const same = before?.stationId === ctx.actor.id && before.contentSha256.equals(contentSha256);
    return { id, outcome: same ? "duplicate" : "conflict", flags: [] };
  });
}

/** One event for the batch; an upload that brought nothing new leaves none. */
async function note(
  ctx: StationCtx,
  trx: Trx,
  kept: readonly query.WriteRow[],
  results: readonly WriteResult[],
): Promise<void> {
  const conflicts = results.filter((result) => result.outcome === "conflict").map((result) => result.id);
  if (kept.length === 0 && conflicts.length === 0) return;
  const root = createHash("sha256").update(Buffer.concat(kept.map((row) => row.contentSha256)));
  await appendEvent(ctx, trx, {
    action: "writes.recorded",
    subject: ctx.actor.id,
    data: { count: kept.length, root: root.digest("hex"), ...(conflicts.length > 0 && { conflicts }) },
  });
}
