import { getLedgerHead } from "@/lib/http/commands/ledger";
import { route } from "@/lib/http/route";

export const GET = route(getLedgerHead);
