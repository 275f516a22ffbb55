import { getLayoutText, keepLayoutText } from "@/lib/http/commands/layouts";
import { route } from "@/lib/http/route";

export const GET = route(getLayoutText);
export const PUT = route(keepLayoutText);
