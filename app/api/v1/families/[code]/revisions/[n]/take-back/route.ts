import { takeBackRevision } from "@/lib/http/commands/families";
import { route } from "@/lib/http/route";

export const POST = route(takeBackRevision);
