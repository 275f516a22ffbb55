import { getRunPlanTemplate } from "@/lib/http/commands/run-plans";
import { route } from "@/lib/http/route";

export const GET = route(getRunPlanTemplate);
