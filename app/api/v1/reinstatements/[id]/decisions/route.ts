import { decideReinstatement } from "@/lib/http/commands/reinstatements";
import { route } from "@/lib/http/route";

export const POST = route(decideReinstatement);
