import { reportWrites } from "@/lib/http/commands/stations";
import { route } from "@/lib/http/route";

export const POST = route(reportWrites);
