"use server";

import { revalidatePath } from "next/cache";
import { type ActionResult, runAction } from "@/lib/http/action";
import * as command from "@/lib/http/commands/equipment";
import type { EquipmentChange, NewEquipment } from "@/schemas/api/equipment";

export async function addEquipmentAction(equipment: NewEquipment): Promise<ActionResult> {
  const result = await runAction(command.addEquipment, { body: equipment });
  if (result.ok) revalidatePath("/equipment", "layout");
  return result;
}

export async function changeEquipmentAction(code: string, change: EquipmentChange): Promise<ActionResult> {
  const result = await runAction(command.changeEquipment, { params: { code }, body: change });
  if (result.ok) revalidatePath("/equipment", "layout");
  return result;
}
