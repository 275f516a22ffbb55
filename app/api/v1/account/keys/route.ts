import { listKeys, makeKey } from "@/lib/http/commands/account";
import { route } from "@/lib/http/route";

export const GET = route(listKeys);
export const POST = route(makeKey);
