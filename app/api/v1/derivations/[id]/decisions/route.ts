import { decide } from "@/lib/http/commands/derivations";
import { route } from "@/lib/http/route";

export const POST = route(decide);
