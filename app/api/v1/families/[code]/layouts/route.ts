import { createLayout, listLayouts } from "@/lib/http/commands/layouts";
import { route } from "@/lib/http/route";

export const GET = route(listLayouts);
export const POST = route(createLayout);
