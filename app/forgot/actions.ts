"use server";

import { type ActionResult, runAction } from "@/lib/http/action";
import { askForPasswordLink } from "@/lib/http/commands/people";

export async function askForLinkAction(email: string): Promise<ActionResult> {
  return runAction(askForPasswordLink, { body: { email } });
}
