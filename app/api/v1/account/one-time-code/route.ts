import { beginOneTimeCode } from "@/lib/http/commands/account";
import { route } from "@/lib/http/route";

export const POST = route(beginOneTimeCode);
