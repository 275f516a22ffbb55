import { getProofRun } from "@/lib/http/commands/proofs";
import { route } from "@/lib/http/route";

export const GET = route(getProofRun);
