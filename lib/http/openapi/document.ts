import type { z } from "zod";
import { createDocument, type oas31, type ZodOpenApiPathsObject } from "zod-openapi";
import { sessionCookieName } from "@/lib/auth/session-token";
import packageJson from "@/package.json";
import { health } from "@/schemas/api/health";
import { problem } from "@/schemas/api/problem";
import type { AnyCommand } from "../command";
import { commands } from "../registry";
import { operationOf } from "./operation";
import { Refusals } from "./replies";

export type OpenApiDocument = ReturnType<typeof createDocument>;

let made: OpenApiDocument | undefined;

/** The OpenAPI 3.1 document of `/api/v1`, made from the commands; once a process. */
export function openApiDocument(): OpenApiDocument {
  made ??= makeDocument(commands);
  return made;
}

function makeDocument(from: readonly AnyCommand[]): OpenApiDocument {
  const refusals = new Refusals();
  const paths = pathsOf(from, refusals);
  const { responses } = refusals;
  const document = createDocument(
    {
      openapi: "3.1.1",
      info: { title: "Trimwright", version: packageJson.version, description: DESCRIPTION },
      servers: [{ url: "/api/v1" }],
      paths: { ...paths, "/api/health": HEALTH },
      components: { schemas: schemasOf(from), responses, parameters: PARAMETERS, securitySchemes: securitySchemes() },
    },
    {
      // Replies may get new members: a reader leaves out what it doesn't know.
      override: ({ jsonSchema, zodSchema, io }) => {
        const { def } = zodSchema._zod;
        if (io === "output" && def.type === "object" && !("catchall" in def && def.catchall))
          delete jsonSchema.additionalProperties;
      },
      outputIdSuffix: OUTPUT,
    },
  );
  return withOutputsOnly(document);
}

const OUTPUT = "~output";

/**
 * Named schemas are replies only, but the library also writes down what they would take where that differs. Leaves out the
 * latter and gives the former its name.
 */
function withOutputsOnly(document: OpenApiDocument): OpenApiDocument {
  const { schemas = {} } = document.components ?? {};
  for (const name of Object.keys(schemas)) if (schemas[name + OUTPUT]) delete schemas[name];
  return JSON.parse(JSON.stringify(document).replaceAll(OUTPUT, ""));
}

const DESCRIPTION = `Lists take \`limit\` (100, at most 1,000) and \`cursor\`, and answer \`items\` and \`next\`, null at the end.
Ids in paths may be codes where the parameter is called code or serial. Times are RFC 3339, UTC, with milliseconds. Errors are
problem details (RFC 9457) with a stable \`code\`. Calls that change something and come with a session have to carry this site's
\`Origin\`. Readers have to leave out members that they don't know.`;

function pathsOf(from: readonly AnyCommand[], refusals: Refusals): ZodOpenApiPathsObject {
  const paths: ZodOpenApiPathsObject = {};
  for (const command of from) {
    const method = command.method.toLowerCase() as "get";
    paths[command.path] = { ...paths[command.path], [method]: operationOf(command, refusals) };
  }
  return paths;
}

/** Every reply has a name, that of the first call which gives it. */
function schemasOf(from: readonly AnyCommand[]): Record<string, z.ZodType> {
  const names = new Map<z.ZodType, string>();
  for (const { id, reply } of from)
    if (reply.schema && !names.has(reply.schema)) names.set(reply.schema, replyName(id));
  return { ...Object.fromEntries([...names].map(([schema, name]) => [name, schema])), Problem: problem };
}

function replyName(id: string): string {
  return `${id.replaceAll(/(?:^|[.-])(\w)/g, (_, letter: string) => letter.toUpperCase())}Reply`;
}

const healthReply = (description: string) => ({ description, content: { "application/json": { schema: health } } });

/** Beside `/api/v1`, hence its own server. */
const HEALTH: ZodOpenApiPathsObject[string] = {
  servers: [{ url: "/" }],
  get: {
    operationId: "health",
    summary: "Whether database and job queues work",
    description: "Asks for no credential.",
    tags: ["health"],
    security: [],
    responses: { "200": healthReply("Everything works"), "503": healthReply("A part is down, and which") },
  },
};

const header = (name: string, description: string, schema: oas31.SchemaObject): oas31.ParameterObject => ({
  name,
  in: "header",
  required: false,
  description,
  schema,
});

const PARAMETERS = {
  IdempotencyKey: header(
    "Idempotency-Key",
    "Repeats of a call with the same key and body within 24 h get the first reply; the same key with another body is refused.",
    { type: "string", minLength: 1, maxLength: 200 },
  ),
  Range: header("Range", "One range of bytes", { type: "string", examples: ["bytes=0-1048575"] }),
  IfNoneMatch: header("If-None-Match", "ETags of what the client has", { type: "string" }),
};

function securitySchemes(): Record<string, oas31.SecuritySchemeObject> {
  return {
    session: { type: "apiKey", in: "cookie", name: sessionCookieName(), description: "A browser signed in" },
    accessKey: { type: "http", scheme: "bearer", description: "A person's access key: reading and an engineer's work" },
    stationKey: { type: "http", scheme: "bearer", description: "A programming station's key" },
  };
}
