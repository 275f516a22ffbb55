import { removeOneTimeCode } from "@/lib/http/commands/account";
import { route } from "@/lib/http/route";

export const POST = route(removeOneTimeCode);
