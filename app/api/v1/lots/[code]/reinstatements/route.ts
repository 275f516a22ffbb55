import { askReinstatement, listReinstatements } from "@/lib/http/commands/reinstatements";
import { route } from "@/lib/http/route";

export const GET = route(listReinstatements);
export const POST = route(askReinstatement);
