import { getStationLive } from "@/lib/http/commands/stations";
import { route } from "@/lib/http/route";

export const GET = route(getStationLive);
