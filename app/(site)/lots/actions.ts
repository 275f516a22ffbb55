"use server";

import { type ActionResult, runAction } from "@/lib/http/action";
import * as command from "@/lib/http/commands/lots";
import type { NewLot } from "@/schemas/api/lots";

export async function createLotAction(lot: NewLot): Promise<ActionResult<{ code: string }>> {
  return runAction(command.createLot, { body: lot });
}
