import { cancelPackageBuild } from "@/lib/http/commands/packages";
import { route } from "@/lib/http/route";

export const POST = route(cancelPackageBuild);
