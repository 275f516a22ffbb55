import type { QueueName } from "./queues";

/** What each job carries: ids only, so that a job taken up again reads the state as it is then. */
export interface JobPayloads extends Record<QueueName, object> {
  derive: { derivationId: string };
  "build-package": { packageId: string };
  "rebuild-package": { packageId: string; askedBy: string };
  "assemble-bundle": { packageId: string };
  "send-mail": { mailId: string };
  tidy: Record<string, never>;
}
