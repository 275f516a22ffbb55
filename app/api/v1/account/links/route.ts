import { askForPasswordLink } from "@/lib/http/commands/people";
import { route } from "@/lib/http/route";

export const POST = route(askForPasswordLink);
