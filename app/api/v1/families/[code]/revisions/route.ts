import { createFamilyRevision } from "@/lib/http/commands/families";
import { route } from "@/lib/http/route";

export const POST = route(createFamilyRevision);
