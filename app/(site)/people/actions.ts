"use server";

import { revalidatePath } from "next/cache";
import { type ActionResult, runAction } from "@/lib/http/action";
import * as command from "@/lib/http/commands/people";
import type { PersonView } from "@/schemas/api/people";

export interface Signed {
  password?: string;
  oneTimeCode?: string;
  reason?: string;
}

function refresh<T extends ActionResult>(result: T): T {
  if (result.ok) revalidatePath("/people", "layout");
  return result;
}

export async function addPersonAction(
  person: { name: string; email: string; roles: string[] } & Signed,
): Promise<ActionResult<PersonView>> {
  return refresh(await runAction<PersonView>(command.addPerson, { body: person }));
}

export async function changePersonAction(
  id: string,
  change: { name?: string; email?: string; active?: boolean; roles?: string[] } & Signed,
): Promise<ActionResult<PersonView>> {
  return refresh(await runAction<PersonView>(command.changePerson, { params: { id }, body: change }));
}

export async function decideRoleAction(
  id: string,
  role: string,
  decision: "confirm" | "refuse",
  signed: Signed,
): Promise<ActionResult> {
  const decided = decision === "confirm" ? command.confirmRole : command.refuseRole;
  return refresh(await runAction(decided, { params: { id, role }, body: signed }));
}

export async function sendLinkAction(id: string, signed: Signed): Promise<ActionResult> {
  return refresh(await runAction(command.sendPersonLink, { params: { id }, body: signed }));
}
