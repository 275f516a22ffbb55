"use server";

import { revalidatePath } from "next/cache";
import { type ActionResult, runAction } from "@/lib/http/action";
import * as command from "@/lib/http/commands/stations";
import type { StationView } from "@/lib/services/stations/manage-stations";
import type { StationChange } from "@/schemas/api/stations";

export async function addStationAction(station: {
  name: string;
  families: string[];
}): Promise<ActionResult<StationView>> {
  const result = await runAction<StationView>(command.createStation, { body: station });
  if (result.ok) revalidatePath("/stations");
  return result;
}

export async function changeStationAction(id: string, change: StationChange): Promise<ActionResult<StationView>> {
  const result = await runAction<StationView>(command.changeStation, { params: { id }, body: change });
  if (result.ok) revalidatePath("/stations", "layout");
  return result;
}

export async function makeKeyAction(
  id: string,
  signed: { password?: string; oneTimeCode?: string },
): Promise<ActionResult<{ id: string; key: string; prefix: string }>> {
  const result = await runAction<{ id: string; key: string; prefix: string }>(command.createStationKey, {
    params: { id },
    body: signed,
  });
  if (result.ok) revalidatePath(`/stations/${id}`);
  return result;
}

export async function endKeyAction(id: string, key: string): Promise<ActionResult> {
  const result = await runAction(command.revokeStationKey, { params: { id, key } });
  if (result.ok) revalidatePath(`/stations/${id}`);
  return result;
}
