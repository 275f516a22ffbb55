/**
 * Which jobs a living worker has at hand. Each is claimed by an advisory lock on a connection that the worker keeps: when the
 * worker is killed the database lets go of it, and the next worker sees at once that nobody works on the job any more, instead
 * of waiting until it expires.
 */
import { type Kysely, sql } from "kysely";
import type { DB } from "@/db/generated/types.generated";
import type { QueueName } from "@/lib/jobs/queues";

/** A job that was begun and that nobody works on. */
export interface LostJob {
  id: string;
  queue: QueueName;
}

/** Time between taking a job and claiming it that is still no reason to take it for lost. */
const CLAIMED_WITHIN_SECONDS = 5;

const lockOf = (jobId: string) => sql`hashtextextended(${`job ${jobId}`}, 0)`;

export class JobClaims {
  readonly #own = new Set<string>();
  readonly #connection: Kysely<DB>;
  /** Gives the connection back. */
  readonly close: () => void;

  private constructor(connection: Kysely<DB>, close: () => void) {
    this.#connection = connection;
    this.close = close;
  }

  /** Takes a connection of the pool until it is closed. */
  static open(db: Kysely<DB>): Promise<JobClaims> {
    return new Promise((resolve, reject) => {
      const keep = (connection: Kysely<DB>) => new Promise<void>((close) => resolve(new JobClaims(connection, close)));
      db.connection().execute(keep).catch(reject);
    });
  }

  /** Does the work of a job while it is claimed. */
  async during(jobId: string, work: () => Promise<void>): Promise<void> {
    this.#own.add(jobId);
    await sql`select pg_advisory_lock(${lockOf(jobId)})`.execute(this.#connection);
    try {
      await work();
    } finally {
      await sql`select pg_advisory_unlock(${lockOf(jobId)})`.execute(this.#connection);
      this.#own.delete(jobId);
    }
  }

  /** Jobs that were begun some seconds ago and that no worker has at hand. */
  async findLost(): Promise<LostJob[]> {
    const { rows } = await sql<LostJob>`
      select id, name as queue from pgboss.job
      where state = 'active' and started_on < now() - make_interval(secs => ${CLAIMED_WITHIN_SECONDS})
    `.execute(this.#connection);
    const lost: LostJob[] = [];
    for (const job of rows) if (!this.#own.has(job.id) && (await this.#isFree(job.id))) lost.push(job);
    return lost;
  }

  async #isFree(jobId: string): Promise<boolean> {
    const { rows } = await sql<{ free: boolean }>`
      select case when pg_try_advisory_lock(${lockOf(jobId)}) then pg_advisory_unlock(${lockOf(jobId)}) else false end as free
    `.execute(this.#connection);
    return rows[0]?.free === true;
  }
}
