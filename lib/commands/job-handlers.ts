import type { JobRunner } from "@/lib/jobs/drain-jobs";
import type { JobPayloads } from "@/lib/jobs/payloads";
import type { QueueName } from "@/lib/jobs/queues";
import type { Ctx } from "@/lib/services/context";
import { runDerivation } from "@/lib/services/derivations/run-derivation";
import { sendQueuedMail } from "@/lib/services/mail/send-mail";
import { assembleBundle } from "@/lib/services/packages/assemble-bundle";
import { buildPackage } from "@/lib/services/packages/build-package";
import { rebuildPackage } from "@/lib/services/packages/rebuild-package";
import { tidy } from "@/lib/services/tidy/tidy";

export type JobHandlers = { [Q in QueueName]?: (ctx: Ctx, payload: JobPayloads[Q]) => Promise<void> };

/** Which service does the work of each queue. */
export const jobHandlers: JobHandlers = {
  derive: runDerivation,
  "send-mail": sendQueuedMail,
  tidy: async (ctx) => {
    await tidy(ctx);
  },
  "build-package": buildPackage,
  "rebuild-package": rebuildPackage,
  "assemble-bundle": async (ctx, { packageId }) => {
    await assembleBundle(ctx, packageId);
  },
};

/** The handlers as runners of `drainJobs`, each job with a context made for it. */
export function runnersFor(makeCtx: () => Ctx): JobRunner {
  return Object.fromEntries(
    Object.entries(jobHandlers).map(([queue, handle]) => [
      queue,
      (payload: object) => (handle as (ctx: Ctx, payload: object) => Promise<void>)(makeCtx(), payload),
    ]),
  );
}
