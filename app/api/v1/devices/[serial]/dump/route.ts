import { checkDeviceDump } from "@/lib/http/commands/devices";
import { route } from "@/lib/http/route";

export const POST = route(checkDeviceDump);
