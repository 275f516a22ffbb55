import { listImages } from "@/lib/http/commands/images";
import { route } from "@/lib/http/route";

export const GET = route(listImages);
