import { addRun, listRuns } from "@/lib/http/commands/runs";
import { route } from "@/lib/http/route";

export const GET = route(listRuns);
export const POST = route(addRun);
