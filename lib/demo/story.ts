/** The demo told in the past: a clock that moves, the people, and what they are called with. */
import { v7 } from "uuid";
import type { Db } from "@/db/executor";
import { runnersFor } from "@/lib/commands/job-handlers";
import { drainJobs } from "@/lib/jobs/drain-jobs";
import type { Ctx, PersonActor, PersonCtx, StationActor, StationCtx } from "@/lib/services/context";
import type { DemoPeople, DemoPersonName } from "./people";

const DAY_MS = 86_400_000;

/** Time as the demo's services see it. Every look moves it a little, so that what happens later is later. */
export class DemoClock {
  #now: number;

  /** Starts a number of days before `today`. */
  constructor(today: Date, daysBefore: number) {
    this.#now = today.getTime() - daysBefore * DAY_MS;
  }

  now = (): Date => {
    this.#now += 5;
    return new Date(this.#now);
  };

  /** A time-ordered id of this clock's time, so that ids of the past sort before those of today. */
  newId = (): string => {
    this.#now += 1;
    return v7({ msecs: this.#now });
  };

  /** Jumps to a number of days before `today`, at an hour of that day (UTC); never back. */
  to(today: Date, daysBefore: number, hour: number): Date {
    const midnight = Math.floor(today.getTime() / DAY_MS) * DAY_MS;
    this.#now = Math.max(this.#now, Math.min(midnight - daysBefore * DAY_MS + hour * 3_600_000, today.getTime()));
    return new Date(this.#now);
  }
}

export interface Story {
  db: Db;
  /** When the demo was started. */
  today: Date;
  clock: DemoClock;
  as(name: DemoPersonName): PersonCtx;
  asStation(station: StationActor): StationCtx;
  /** Does what the worker would do. */
  work(): Promise<void>;
}

/** @param people the accounts, all already in the database. */
export function makeStory(db: Db, today: Date, clock: DemoClock, people: DemoPeople): Story {
  const base = { db, now: clock.now, newId: clock.newId, address: "" };
  const system = (): Ctx => ({ ...base, actor: { kind: "system" }, requestId: v7() });
  const personActor = (name: DemoPersonName): PersonActor => ({
    kind: "person",
    ...people[name],
    via: "session",
    sessionId: null,
  });
  return {
    db,
    today,
    clock,
    as: (name) => ({ ...base, actor: personActor(name), requestId: v7() }),
    asStation: (station) => ({ ...base, actor: station, requestId: v7() }),
    work: async () => {
      await drainJobs(db, runnersFor(system));
    },
  };
}
