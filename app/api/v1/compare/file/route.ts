import { compareWithFile } from "@/lib/http/commands/compare";
import { route } from "@/lib/http/route";

export const POST = route(compareWithFile);
