import { headers } from "next/headers";
import { redirect } from "next/navigation";
import { getDb } from "@/db/client";
import type { Role } from "@/lib/domain/roles";
import { findSessionActor } from "@/lib/services/account/find-session-actor";
import { findSessionId } from "./session-token";

export interface CurrentPerson {
  id: string;
  name: string;
  email: string;
  roles: readonly Role[];
}

/** The person signed in with this browser, undefined where nobody is. For server components and actions. */
export async function findCurrentPerson(): Promise<CurrentPerson | undefined> {
  const sessionId = await findSessionId(await headers());
  const actor = sessionId && (await findSessionActor(getDb(), sessionId, new Date()));
  if (!actor) return undefined;
  const { id, name, email, roles } = actor;
  return { id, name, email, roles };
}

/** The signed-in person; anybody else is sent to the sign-in page, and back afterwards. */
export async function requirePerson(): Promise<CurrentPerson> {
  const person = await findCurrentPerson();
  if (person !== undefined) return person;
  const back = (await headers()).get("x-path") ?? "/today";
  redirect(`/sign-in?back=${encodeURIComponent(back)}`);
}
