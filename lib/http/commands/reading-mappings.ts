import { READERS } from "@/lib/domain/roles";
import { command } from "@/lib/http/command";
import * as service from "@/lib/services/reading-mappings/keep-reading-mapping";
import { byCodeOrId } from "@/schemas/api/common";
import { keptMapping, readingMapping } from "@/schemas/api/reading-mappings";

export const getReadingMapping = command({
  id: "readingMappings.get",
  method: "GET",
  path: "/families/{code}/reading-mapping",
  summary: "How foreign tables of readings of a family were read last",
  access: { who: "person", roles: READERS },
  params: byCodeOrId,
  reply: { status: 200, schema: keptMapping },
  errors: ["family.not_found"],
  handle: (ctx, { params }) => service.getReadingMapping(ctx, params.code),
});

export const setReadingMapping = command({
  id: "readingMappings.set",
  method: "PUT",
  path: "/families/{code}/reading-mapping",
  summary: "Remembers how foreign tables of readings of a family are read",
  access: { who: "person", roles: ["engineer"] },
  params: byCodeOrId,
  body: readingMapping,
  reply: { status: 200, schema: keptMapping },
  errors: ["family.not_found"],
  handle: (ctx, { params, body }) => service.setReadingMapping(ctx, params.code, body),
});

export const readingMappingCommands = [getReadingMapping, setReadingMapping];
