import { keepLayoutText } from "@/lib/http/commands/layouts";
import { route } from "@/lib/http/route";

export const PUT = route(keepLayoutText);
