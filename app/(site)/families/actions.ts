"use server";

import { revalidatePath } from "next/cache";
import { type ActionResult, runAction } from "@/lib/http/action";
import * as command from "@/lib/http/commands/families";
import type { FamilyDocument } from "@/schemas/api/families";

export interface SignedDecision {
  decision: "approve" | "refuse";
  reason?: string;
  password?: string;
  oneTimeCode?: string;
}

export async function createFamilyAction(document: FamilyDocument): Promise<ActionResult> {
  return runAction(command.createFamily, { body: document });
}

export async function reviseFamilyAction(code: string, document: FamilyDocument): Promise<ActionResult> {
  return runAction(command.createFamilyRevision, { params: { code }, body: document });
}

export async function moveRevisionAction(
  code: string,
  number: number,
  move: "submit" | "take-back",
): Promise<ActionResult> {
  const moved = move === "submit" ? command.submitRevision : command.takeBackRevision;
  const result = await runAction(moved, { params: { code, n: String(number) } });
  revalidatePath(`/families/${code}`);
  return result;
}

export async function decideRevisionAction(
  code: string,
  number: number,
  decision: SignedDecision,
): Promise<ActionResult> {
  const result = await runAction(command.decideRevision, { params: { code, n: String(number) }, body: decision });
  if (result.ok) revalidatePath(`/families/${code}`);
  return result;
}
