import { revokeStationKey } from "@/lib/http/commands/stations";
import { route } from "@/lib/http/route";

export const DELETE = route(revokeStationKey);
