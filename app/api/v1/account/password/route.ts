import { changePassword } from "@/lib/http/commands/account";
import { route } from "@/lib/http/route";

export const PUT = route(changePassword);
