/** Names of the job queues; the owner creates them when it migrates, the app's role only uses them. */
export const QUEUES = ["derive", "build-package", "rebuild-package", "assemble-bundle", "send-mail", "tidy"] as const;

export type QueueName = (typeof QUEUES)[number];

/** Name of the worker's connections to the database; by it the health check sees whether one is there. */
export const WORKER_NAME = "trimwright-worker";
