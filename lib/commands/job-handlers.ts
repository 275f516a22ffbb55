import type { JobPayloads } from "@/lib/jobs/payloads";
import type { QueueName } from "@/lib/jobs/queues";
import type { Ctx } from "@/lib/services/context";
import { runDerivation } from "@/lib/services/derivations/run-derivation";

export type JobHandlers = { [Q in QueueName]?: (ctx: Ctx, payload: JobPayloads[Q]) => Promise<void> };

/** Which service does the work of each queue. */
export const jobHandlers: JobHandlers = {
  derive: runDerivation,
};
