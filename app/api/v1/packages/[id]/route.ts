import { getPackage } from "@/lib/http/commands/packages";
import { route } from "@/lib/http/route";

export const GET = route(getPackage);
