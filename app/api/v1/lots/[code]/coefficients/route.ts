import { importSets, listCoefficients } from "@/lib/http/commands/coefficients";
import { route } from "@/lib/http/route";

export const GET = route(listCoefficients);
export const POST = route(importSets);
