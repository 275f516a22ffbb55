import { changeStation, getStation } from "@/lib/http/commands/stations";
import { route } from "@/lib/http/route";

export const GET = route(getStation);
export const PATCH = route(changeStation);
