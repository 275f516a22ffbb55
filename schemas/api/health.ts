import { z } from "zod";

const part = z.enum(["ok", "down"]);

/** `GET /api/health`: what works now; `queue` needs its tables and a worker. */
export const health = z.object({ status: part, database: part, queue: part, version: z.string() });

export type HealthReply = z.output<typeof health>;
