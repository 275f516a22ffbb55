import { getLot } from "@/lib/http/commands/lots";
import { route } from "@/lib/http/route";

export const GET = route(getLot);
