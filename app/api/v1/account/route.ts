import { getAccount } from "@/lib/http/commands/account";
import { route } from "@/lib/http/route";

export const GET = route(getAccount);
