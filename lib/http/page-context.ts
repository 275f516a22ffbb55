import { headers } from "next/headers";
import { notFound, redirect } from "next/navigation";
import { resolveActor } from "@/lib/auth/resolve-actor";
import { READERS, type Role } from "@/lib/domain/roles";
import { AppError, statusOf } from "@/lib/errors";
import type { PersonCtx } from "@/lib/services/context";
import { newContext } from "./route";

/**
 * The context of a page: a signed-in person, else the sign-in page and back.
 * Most pages are for readers; who holds none of the roles, as an operator, is taken to the bench.
 * @param roles who may see the page; `anybody` for what everybody signed in has, with or without a role.
 */
export async function pageContext(roles: readonly Role[] | "anybody" = READERS): Promise<PersonCtx> {
  const requestHeaders = await headers();
  const actor = await resolveActor(requestHeaders);
  if (actor.kind !== "person") {
    const back = requestHeaders.get("x-path") ?? "/today";
    redirect(`/sign-in?back=${encodeURIComponent(back)}`);
  }
  const ctx = newContext(actor) as PersonCtx;
  if (roles !== "anybody" && !holds(ctx, ...roles))
    redirect(actor.roles.includes("operator") ? "/stations/bench" : "/account");
  return ctx;
}

/** Whether the person of a page holds one of the roles. */
export function holds(ctx: PersonCtx, ...roles: readonly Role[]): boolean {
  return roles.some((role) => ctx.actor.roles.includes(role));
}

/** A page's data: what is not there becomes the not-found page, anything else is thrown on. */
export async function orNotFound<T>(load: Promise<T>): Promise<T> {
  try {
    return await load;
  } catch (error) {
    if (error instanceof AppError && statusOf(error.code).status === 404) notFound();
    throw error;
  }
}
