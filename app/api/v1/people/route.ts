import { addPerson, listPeople } from "@/lib/http/commands/people";
import { route } from "@/lib/http/route";

export const GET = route(listPeople);
export const POST = route(addPerson);
