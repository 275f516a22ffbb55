import { addDevices, listLotDevices } from "@/lib/http/commands/lots";
import { route } from "@/lib/http/route";

export const GET = route(listLotDevices);
export const POST = route(addDevices);
