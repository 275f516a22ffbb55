import { retireLayout } from "@/lib/http/commands/layouts";
import { route } from "@/lib/http/route";

export const POST = route(retireLayout);
