import { getUse } from "@/lib/http/commands/layouts";
import { route } from "@/lib/http/route";

export const GET = route(getUse);
