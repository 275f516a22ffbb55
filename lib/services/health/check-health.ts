import type { Db } from "@/db/executor";
import { askDatabase, isConnected, listQueueNames } from "@/db/queries/health";
import { QUEUES, WORKER_NAME } from "@/lib/jobs/queues";

export type Part = "ok" | "down";

export interface Health {
  database: Part;
  /** Jobs are taken: every queue is there and a worker is connected. */
  queue: Part;
  /** What stands against it, in words for the log. */
  reasons: string[];
}

/** Looks whether the parts work now. Never throws: what fails is down. */
export async function checkHealth(db: Db): Promise<Health> {
  const reasons: string[] = [];
  const database = await judge("database", reasons, () => askDatabase(db));
  const queue = database === "ok" ? await judge("queue", reasons, () => assertQueues(db)) : "down";
  return { database, queue, reasons };
}

/** @throws Error naming what is missing */
async function assertQueues(db: Db): Promise<void> {
  const present = await listQueueNames(db);
  const missing = QUEUES.filter((name) => !present.includes(name));
  if (missing.length > 0) throw new Error(`queues missing: ${missing.join(", ")}`);
  if (!(await isConnected(db, WORKER_NAME))) throw new Error("no worker is connected");
}

async function judge(part: string, reasons: string[], look: () => Promise<void>): Promise<Part> {
  try {
    await look();
    return "ok";
  } catch (error) {
    reasons.push(`${part}: ${error instanceof Error ? error.message : String(error)}`);
    return "down";
  }
}
