/** Names of the job queues; the owner creates them when it migrates, the app's role only uses them. */
export const QUEUES = ["derive", "build-package", "rebuild-package", "assemble-bundle", "send-mail", "tidy"] as const;

export type QueueName = (typeof QUEUES)[number];
