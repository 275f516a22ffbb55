import { rebuildPackage } from "@/lib/http/commands/rebuilds";
import { route } from "@/lib/http/route";

export const POST = route(rebuildPackage);
