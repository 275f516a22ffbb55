import { endOtherSessions, listSessions } from "@/lib/http/commands/account";
import { route } from "@/lib/http/route";

export const GET = route(listSessions);
export const DELETE = route(endOtherSessions);
