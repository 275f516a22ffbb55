import { getReadingMapping, setReadingMapping } from "@/lib/http/commands/reading-mappings";
import { route } from "@/lib/http/route";

export const GET = route(getReadingMapping);
export const PUT = route(setReadingMapping);
