import type { Db } from "@/db/executor";
import type { Role } from "@/lib/domain/roles";
import { AppError } from "@/lib/errors";

/** A signed-in person. `via` tells a browser session from a bearer key; decisions accept sessions only. */
export interface PersonActor {
  kind: "person";
  id: string;
  name: string;
  roles: readonly Role[];
  via: "session" | "key";
  sessionId: string | null;
}

/** A programming station, known by its own key. */
export interface StationActor {
  kind: "station";
  id: string;
  name: string;
  familyIds: readonly string[];
}

/** Nobody: public calls, and the product itself (worker, seed, first start). */
export interface AnonymousActor {
  kind: "public" | "system";
}

export type Actor = PersonActor | StationActor | AnonymousActor;

/** What every service gets: where to remember, who asks, and the sources of time and identity. */
export interface Ctx<A extends Actor = Actor> {
  db: Db;
  actor: A;
  now: () => Date;
  /** A time-ordered UUID (version 7), so that ids sort by age and serve as cursors. */
  newId: () => string;
  requestId: string;
  /** The caller's address, for the access log; empty where there is none. */
  address: string;
}

export type PersonCtx = Ctx<PersonActor>;
export type StationCtx = Ctx<StationActor>;

/** Asserts that a person asks. @throws AppError `auth.required` */
export function assertPerson(ctx: Ctx): asserts ctx is PersonCtx {
  if (ctx.actor.kind !== "person") throw new AppError("auth.required", { message: "Sign in to do this." });
}

/** Asserts that a person with one of the roles asks. @throws AppError `auth.required`, `auth.forbidden` */
export function assertRole(ctx: Ctx, ...roles: readonly Role[]): asserts ctx is PersonCtx {
  assertPerson(ctx);
  const { roles: held } = ctx.actor;
  if (!roles.some((role) => held.includes(role))) {
    throw new AppError("auth.forbidden", { needs: roles, message: `This needs the role ${roles.join(" or ")}.` });
  }
}

/** The ledger's name of an actor: a person's or station's id, or `system`. Never a name. */
export function actorKey(actor: Actor): string {
  return actor.kind === "person" || actor.kind === "station" ? actor.id : "system";
}
