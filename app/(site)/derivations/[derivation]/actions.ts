"use server";

import { revalidatePath } from "next/cache";
import { type ActionResult, runAction } from "@/lib/http/action";
import { decide } from "@/lib/http/commands/derivations";

export interface DerivationDecisionInput {
  decision: "approve" | "refuse" | "revoke";
  serials?: string[];
  reason?: string;
  acknowledge?: { finding: string; reason: string }[];
  password?: string;
  oneTimeCode?: string;
}

export async function decideDerivationAction(id: string, decision: DerivationDecisionInput): Promise<ActionResult> {
  const result = await runAction(decide, { params: { id }, body: decision });
  if (result.ok) revalidatePath(`/derivations/${id}`);
  return result;
}
