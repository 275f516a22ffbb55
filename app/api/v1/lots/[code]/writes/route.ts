import { listWritesOfLot } from "@/lib/http/commands/devices";
import { route } from "@/lib/http/route";

export const GET = route(listWritesOfLot);
