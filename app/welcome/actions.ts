"use server";

import { type ActionResult, runAction } from "@/lib/http/action";
import { usePasswordLink } from "@/lib/http/commands/people";

export async function choosePasswordAction(use: {
  token: string;
  newPassword: string;
  name?: string;
  email?: string;
}): Promise<ActionResult<{ email: string }>> {
  return runAction<{ email: string }>(usePasswordLink, { body: use });
}
