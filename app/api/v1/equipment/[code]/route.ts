import { changeEquipment, getEquipment } from "@/lib/http/commands/equipment";
import { route } from "@/lib/http/route";

export const GET = route(getEquipment);
export const PATCH = route(changeEquipment);
