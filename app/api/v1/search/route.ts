import { search } from "@/lib/http/commands/today";
import { route } from "@/lib/http/route";

export const GET = route(search);
