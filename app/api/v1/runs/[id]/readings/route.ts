import { listReadings } from "@/lib/http/commands/runs";
import { route } from "@/lib/http/route";

export const GET = route(listReadings);
