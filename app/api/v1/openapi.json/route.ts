import { getOpenApi } from "@/lib/http/commands/openapi";
import { route } from "@/lib/http/route";

export const GET = route(getOpenApi);
