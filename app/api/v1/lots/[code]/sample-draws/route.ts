import { drawSample, listSampleDraws } from "@/lib/http/commands/samples";
import { route } from "@/lib/http/route";

export const GET = route(listSampleDraws);
export const POST = route(drawSample);
