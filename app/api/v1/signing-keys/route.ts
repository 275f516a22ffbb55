import { listSigningKeys } from "@/lib/http/commands/signing-keys";
import { route } from "@/lib/http/route";

export const GET = route(listSigningKeys);
