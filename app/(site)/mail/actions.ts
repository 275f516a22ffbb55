"use server";

import { revalidatePath } from "next/cache";
import { type ActionResult, runAction } from "@/lib/http/action";
import { sendMailAgain } from "@/lib/http/commands/mail";

export async function sendAgainAction(id: string): Promise<ActionResult> {
  const result = await runAction(sendMailAgain, { params: { id } });
  if (result.ok) revalidatePath("/mail", "layout");
  return result;
}
