import { deleteLayout, getLayout, saveLayout } from "@/lib/http/commands/layouts";
import { route } from "@/lib/http/route";

export const GET = route(getLayout);
export const PUT = route(saveLayout);
export const DELETE = route(deleteLayout);
