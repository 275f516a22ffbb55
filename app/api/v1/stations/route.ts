import { createStation, listStations } from "@/lib/http/commands/stations";
import { route } from "@/lib/http/route";

export const GET = route(listStations);
export const POST = route(createStation);
