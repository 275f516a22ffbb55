import { createFamily, listFamilies } from "@/lib/http/commands/families";
import { route } from "@/lib/http/route";

export const GET = route(listFamilies);
export const POST = route(createFamily);
