"use server";

import { revalidatePath } from "next/cache";
import { type ActionResult, runAction } from "@/lib/http/action";
import { createDeviceEvent } from "@/lib/http/commands/devices";

/** Records what happened to a device; the command's schema judges the body. */
export async function recordEventAction(serial: string, event: Record<string, unknown>): Promise<ActionResult> {
  const result = await runAction(createDeviceEvent, { params: { serial }, body: event });
  if (result.ok) revalidatePath(`/trace/${serial}`);
  return result;
}
