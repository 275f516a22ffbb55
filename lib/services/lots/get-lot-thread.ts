import {
  findNewestPackage,
  getLotProgress,
  type LotProgressRow,
  type NewestPackageRow,
} from "@/db/queries/lot-progress";
import { getLot } from "@/db/queries/lots";
import type { Ctx } from "@/lib/services/context";

/** One stitch of a lot's thread. good: done; wait: due; idle: not begun; bad: blocked. */
export interface ThreadStitch {
  tone: "good" | "wait" | "idle" | "bad";
  /** What stands there, in words. */
  count: string;
  /** Why the next one can't begin. */
  blocked?: string;
}

export interface LotThread {
  lot: string;
  serials: ThreadStitch;
  readings: ThreadStitch;
  coefficients: ThreadStitch;
  package: ThreadStitch;
  review: ThreadStitch;
  written: ThreadStitch;
  newestPackageId: string | null;
}

/** How far a lot has come: serials, readings, coefficients, package, review, written. @throws AppError `lot.not_found` */
export async function getLotThread(ctx: Ctx, codeOrId: string): Promise<LotThread> {
  const lot = await getLot(ctx.db, codeOrId);
  const progress = await getLotProgress(ctx.db, lot.id);
  const newest = await findNewestPackage(ctx.db, lot.id);
  return {
    lot: lot.code,
    serials: serialsOf(progress),
    readings: readingsOf(progress),
    coefficients: coefficientsOf(progress),
    package: packageOf(progress, newest),
    review: reviewOf(newest),
    written: writtenOf(progress),
    newestPackageId: newest?.id ?? null,
  };
}

const of = (part: number, whole: number) => `${part.toLocaleString("en")} of ${whole.toLocaleString("en")}`;

function serialsOf({ devices }: LotProgressRow): ThreadStitch {
  if (devices === 0) return { tone: "wait", count: "none yet", blocked: "add serials first" };
  return { tone: "good", count: `${devices.toLocaleString("en")} in the lot` };
}

function readingsOf({ devices, devicesRead, runs }: LotProgressRow): ThreadStitch {
  if (devices === 0) return { tone: "idle", count: "—" };
  if (runs === 0) return { tone: "wait", count: "no run yet" };
  const count = `${runs} ${runs === 1 ? "run" : "runs"}, ${of(devicesRead, devices)} read`;
  return { tone: devicesRead === devices ? "good" : "wait", count };
}

function coefficientsOf({ devices, devicesRead, devicesApproved, devicesProposed }: LotProgressRow): ThreadStitch {
  if (devicesApproved === 0 && devicesProposed === 0)
    return { tone: devicesRead > 0 ? "wait" : "idle", count: devicesRead > 0 ? "none derived" : "—" };
  const count = `${of(devicesApproved, devices)} approved`;
  if (devicesApproved === 0) return { tone: "wait", count, blocked: "waits for a second person" };
  return { tone: devicesApproved === devices ? "good" : "wait", count };
}

function packageOf({ devicesApproved }: LotProgressRow, newest: NewestPackageRow | undefined): ThreadStitch {
  if (!newest) return { tone: devicesApproved > 0 ? "wait" : "idle", count: devicesApproved > 0 ? "none built" : "—" };
  const count = `${newest.version}, ${newest.state.replaceAll("-", " ")}`;
  if (newest.state === "failed")
    return { tone: "bad", count, blocked: newest.cancelled ? "the build was cancelled" : "the build failed" };
  if (newest.failed > 0)
    return { tone: "bad", count, blocked: newest.failed === 1 ? "a check fails" : `${newest.failed} checks fail` };
  return { tone: newest.state === "building" ? "wait" : "good", count };
}

function reviewOf(newest: NewestPackageRow | undefined): ThreadStitch {
  const state = newest?.state;
  if (state === "in-review") return { tone: "wait", count: "waits for a second person" };
  if (state === "refused") return { tone: "bad", count: "refused", blocked: "build another package" };
  if (state === "withdrawn") return { tone: "bad", count: "withdrawn" };
  if (state === "approved") return { tone: "good", count: "approved, not live yet" };
  if (state === "live" || state === "superseded") return { tone: "good", count: state };
  if (state === "draft") return { tone: "wait", count: "not asked for" };
  return { tone: "idle", count: "—" };
}

function writtenOf({ devicesLive, devicesVerified, devicesWritten }: LotProgressRow): ThreadStitch {
  if (devicesLive === 0 && devicesWritten === 0) return { tone: "idle", count: "—" };
  const count = `${of(devicesVerified, Math.max(devicesLive, devicesWritten))} verified`;
  return { tone: devicesLive > 0 && devicesVerified >= devicesLive ? "good" : "wait", count };
}
