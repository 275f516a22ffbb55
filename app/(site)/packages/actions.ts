"use server";

import { revalidatePath } from "next/cache";
import { type ActionResult, runAction } from "@/lib/http/action";
import * as command from "@/lib/http/commands/packages";
import * as reinstatement from "@/lib/http/commands/reinstatements";

/** What a signature takes; the command's schema says what is missing. */
export interface Signed {
  reason?: string;
  password?: string;
  oneTimeCode?: string;
}

const moves = {
  submit: command.submitPackage,
  "take-back": command.takeBackPackage,
  cancel: command.cancelPackageBuild,
  release: command.releasePackage,
  withdraw: command.withdrawPackage,
};

/** Starts a build; its number and id come back at once. */
export async function buildPackageAction(
  lot: string,
  input: { layout: string; step?: string; notes?: string },
): Promise<ActionResult<{ id: string; version: string }>> {
  const result = await runAction<{ id: string; version: string }>(command.buildPackage, {
    params: { code: lot },
    body: input,
  });
  if (result.ok) revalidatePath(`/lots/${lot}/packages`);
  return result;
}

/** Cancels the build of a package, or submits, takes back, releases or withdraws it. */
export async function movePackageAction(id: string, move: keyof typeof moves, signed: Signed): Promise<ActionResult> {
  return packageChanged(id, await runAction(moves[move], { params: { id }, body: signed }));
}

/** Accepts the warning of a check with a reason. */
export async function waiveCheckAction(id: string, waiver: Signed & { check: string }): Promise<ActionResult> {
  return packageChanged(id, await runAction(command.waivePackageCheck, { params: { id }, body: waiver }));
}

/** A second person's decision over what was looked at. */
export async function decidePackageAction(
  id: string,
  decision: Signed & { decision: "approve" | "refuse"; reviewDigest: string },
): Promise<ActionResult> {
  return packageChanged(id, await runAction(command.decidePackage, { params: { id }, body: decision }));
}

/** Asks for an earlier release to be made live again. */
export async function askReinstatementAction(
  lot: string,
  request: Signed & { package: string },
): Promise<ActionResult<{ id: string }>> {
  const result = await runAction<{ id: string }>(reinstatement.askReinstatement, {
    params: { code: lot },
    body: request,
  });
  if (result.ok) revalidatePath(`/lots/${lot}/packages`);
  return result;
}

/** Grants or refuses a reinstatement. */
export async function decideReinstatementAction(
  id: string,
  decision: Signed & { decision: "approve" | "refuse" },
): Promise<ActionResult> {
  return runAction(reinstatement.decideReinstatement, { params: { id }, body: decision });
}

function packageChanged(id: string, result: ActionResult): ActionResult {
  // A refusal may mean that somebody else was quicker: what is shown is fetched anew in both cases.
  revalidatePath(`/packages/${id}`, "layout");
  return result;
}
