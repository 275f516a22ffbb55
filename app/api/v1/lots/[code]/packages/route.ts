import { buildPackage, listPackages } from "@/lib/http/commands/packages";
import { route } from "@/lib/http/route";

export const GET = route(listPackages);
export const POST = route(buildPackage);
