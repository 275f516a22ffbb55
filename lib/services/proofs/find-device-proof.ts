import { listProofRunsOfDevice } from "@/db/queries/proofs";
import type { Ctx } from "@/lib/services/context";
import { type JudgedDevice, judgeProofRuns } from "./judge-proof-run";

/** The newest proof run that could judge a device; undefined where none could. */
export async function findDeviceProof(ctx: Ctx, serial: string): Promise<JudgedDevice | undefined> {
  const runs = await listProofRunsOfDevice(ctx.db, serial);
  const lot = runs[0]?.lot;
  if (lot === undefined) return undefined;
  const judged = await judgeProofRuns(
    ctx,
    lot,
    runs.map((run) => run.id),
  );
  return judged
    .filter((device) => device.serial === serial && device.state !== "not-judged")
    .sort((a, b) => b.readAt.localeCompare(a.readAt))[0];
}
