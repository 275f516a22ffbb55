import { READERS, ROLES } from "@/lib/domain/roles";
import { command } from "@/lib/http/command";
import { listToday } from "@/lib/services/today/list-today";
import { search as find } from "@/lib/services/today/search";
import { searchQuery, searchResult, today } from "@/schemas/api/today";

export const getToday = command({
  id: "today.get",
  method: "GET",
  path: "/today",
  summary: "What waits for the person who asks",
  access: { who: "person", roles: ROLES },
  reply: { status: 200, schema: today },
  handle: (ctx) => listToday(ctx),
});

export const search = command({
  id: "search",
  method: "GET",
  path: "/search",
  summary: "Serials, lots, families and packages by code, version, digest or seal",
  access: { who: "person", roles: [...READERS, "operator"] },
  query: searchQuery,
  reply: { status: 200, schema: searchResult },
  handle: async (ctx, { query }) => ({ items: await find(ctx, query) }),
});

export const todayCommands = [getToday, search];
