import { addEquipment, listEquipment } from "@/lib/http/commands/equipment";
import { route } from "@/lib/http/route";

export const GET = route(listEquipment);
export const POST = route(addEquipment);
