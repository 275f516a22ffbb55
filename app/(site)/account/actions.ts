"use server";

import { revalidatePath } from "next/cache";
import { type ActionResult, runAction } from "@/lib/http/action";
import * as command from "@/lib/http/commands/account";
import type { MadeAccessKey, OneTimeSecret } from "@/schemas/api/account";

export interface Signed {
  password?: string;
  oneTimeCode?: string;
}

function refresh<T extends ActionResult>(result: T): T {
  if (result.ok) revalidatePath("/account");
  return result;
}

export async function makeKeyAction(
  key: { name: string; expiresInDays: number } & Signed,
): Promise<ActionResult<MadeAccessKey>> {
  return refresh(await runAction<MadeAccessKey>(command.makeKey, { body: key }));
}

export async function revokeKeyAction(id: string): Promise<ActionResult> {
  return refresh(await runAction(command.revokeKey, { params: { id } }));
}

export async function changePasswordAction(change: { newPassword: string } & Signed): Promise<ActionResult> {
  return refresh(await runAction(command.changePassword, { body: change }));
}

export async function endSessionAction(id: string): Promise<ActionResult> {
  return refresh(await runAction(command.endSession, { params: { id } }));
}

export async function endOtherSessionsAction(): Promise<ActionResult> {
  return refresh(await runAction(command.endOtherSessions, {}));
}

export async function beginOneTimeCodeAction(password: string): Promise<ActionResult<OneTimeSecret>> {
  return runAction<OneTimeSecret>(command.beginOneTimeCode, { body: { password } });
}

export async function confirmOneTimeCodeAction(code: string): Promise<ActionResult> {
  return refresh(await runAction(command.confirmOneTimeCode, { body: { code } }));
}

export async function removeOneTimeCodeAction(signed: Signed): Promise<ActionResult> {
  return refresh(await runAction(command.removeOneTimeCode, { body: signed }));
}
