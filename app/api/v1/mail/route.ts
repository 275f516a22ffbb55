import { listMail } from "@/lib/http/commands/mail";
import { route } from "@/lib/http/route";

export const GET = route(listMail);
