import { listEquipmentUse } from "@/lib/http/commands/equipment";
import { route } from "@/lib/http/route";

export const GET = route(listEquipmentUse);
