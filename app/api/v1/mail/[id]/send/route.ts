import { sendMailAgain } from "@/lib/http/commands/mail";
import { route } from "@/lib/http/route";

export const POST = route(sendMailAgain);
