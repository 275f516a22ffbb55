import { changePerson, getPerson } from "@/lib/http/commands/people";
import { route } from "@/lib/http/route";

export const GET = route(getPerson);
export const PATCH = route(changePerson);
