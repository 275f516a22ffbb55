import { changeEquipment } from "@/lib/http/commands/equipment";
import { route } from "@/lib/http/route";

export const PATCH = route(changeEquipment);
