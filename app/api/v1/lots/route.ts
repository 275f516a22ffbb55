import { createLot, listLots } from "@/lib/http/commands/lots";
import { route } from "@/lib/http/route";

export const GET = route(listLots);
export const POST = route(createLot);
