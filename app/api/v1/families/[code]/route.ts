import { getFamily } from "@/lib/http/commands/families";
import { route } from "@/lib/http/route";

export const GET = route(getFamily);
