/** Does the waiting jobs of a test's database, as the worker would, until none is left. */
import { v7 as uuidv7 } from "uuid";
import type { Db } from "@/db/executor";
import { runnersFor } from "@/lib/commands/job-handlers";
import { drainJobs as drain } from "@/lib/jobs/drain-jobs";
import type { Ctx } from "@/lib/services/context";

/** @returns how many jobs were done. @throws what a job threw, after marking it failed */
export function drainJobs(db: Db): Promise<number> {
  return drain(
    db,
    runnersFor(() => systemContext(db)),
  );
}

/** The product itself, for services that no person calls. */
export function systemContext(db: Db): Ctx {
  return { db, actor: { kind: "system" }, now: () => new Date(), newId: uuidv7, requestId: uuidv7(), address: "" };
}
