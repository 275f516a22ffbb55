import { addDerivation, listDerivations } from "@/lib/http/commands/derivations";
import { route } from "@/lib/http/route";

export const GET = route(listDerivations);
export const POST = route(addDerivation);
