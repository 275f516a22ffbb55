import { planSample } from "@/lib/http/commands/samples";
import { route } from "@/lib/http/route";

export const GET = route(planSample);
