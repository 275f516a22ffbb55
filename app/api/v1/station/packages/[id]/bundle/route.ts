import { stationBundle } from "@/lib/http/commands/bundles";
import { route } from "@/lib/http/route";

export const GET = route(stationBundle);
