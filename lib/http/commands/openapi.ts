import { z } from "zod";
import { command } from "@/lib/http/command";

export const getOpenApi = command({
  id: "openapi.get",
  method: "GET",
  path: "/openapi.json",
  summary: "This description, OpenAPI 3.1",
  access: { who: "public" },
  reply: {
    status: 200,
    schema: z.looseObject({ openapi: z.string() }),
  },
  // Asked for only when called: the document is made from all commands, this one among them.
  handle: async () => ({ ...(await import("../openapi/document")).openApiDocument() }),
});

export const openApiCommands = [getOpenApi];
