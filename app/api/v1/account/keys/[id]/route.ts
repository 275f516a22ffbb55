import { revokeKey } from "@/lib/http/commands/account";
import { route } from "@/lib/http/route";

export const DELETE = route(revokeKey);
