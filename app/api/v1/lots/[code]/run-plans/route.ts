import { listRunPlans, planRun } from "@/lib/http/commands/run-plans";
import { route } from "@/lib/http/route";

export const GET = route(listRunPlans);
export const POST = route(planRun);
