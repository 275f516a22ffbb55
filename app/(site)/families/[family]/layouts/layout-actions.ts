"use server";

import { revalidatePath } from "next/cache";
import { type ActionResult, runAction } from "@/lib/http/action";
import * as command from "@/lib/http/commands/layouts";
import type { SignedDecision } from "../../actions";

export interface LayoutAddress {
  code: string;
  version: string;
}

const moves = { submit: command.submitLayout, "take-back": command.takeBackLayout, delete: command.deleteLayout };

export async function moveLayoutAction(
  { code, version }: LayoutAddress,
  move: keyof typeof moves,
): Promise<ActionResult> {
  const result = await runAction(moves[move], { params: { code, version } });
  revalidatePath(`/families/${code}`);
  return result;
}

export async function retireLayoutAction(
  { code, version }: LayoutAddress,
  reason: string | undefined,
): Promise<ActionResult> {
  const result = await runAction(command.retireLayout, { params: { code, version }, body: { reason } });
  if (result.ok) revalidatePath(`/families/${code}`);
  return result;
}

export async function decideLayoutAction(
  { code, version }: LayoutAddress,
  decision: SignedDecision,
): Promise<ActionResult> {
  const result = await runAction(command.decideLayout, { params: { code, version }, body: decision });
  if (result.ok) revalidatePath(`/families/${code}`);
  return result;
}
