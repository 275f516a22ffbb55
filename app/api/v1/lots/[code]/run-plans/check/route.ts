import { checkRunPlan } from "@/lib/http/commands/run-plans";
import { route } from "@/lib/http/route";

export const POST = route(checkRunPlan);
