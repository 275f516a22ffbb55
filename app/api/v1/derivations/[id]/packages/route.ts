import { listPackages } from "@/lib/http/commands/derivations";
import { route } from "@/lib/http/route";

export const GET = route(listPackages);
