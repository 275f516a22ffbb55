import { compareOverview } from "@/lib/http/commands/compare";
import { route } from "@/lib/http/route";

export const GET = route(compareOverview);
