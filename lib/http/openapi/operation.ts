import type { z } from "zod";
import type { ZodObjectInput, ZodOpenApiOperationObject, ZodOpenApiRequestBodyObject } from "zod-openapi";
import type { AnyCommand } from "../command";
import { isUpload } from "../command";
import { answersRanges, bytesAs, type Refusals, repliesOf } from "./replies";

/** The operation of one command: everything that a client has to know to call it. */
export function operationOf(command: AnyCommand, refusals: Refusals): ZodOpenApiOperationObject {
  const { id, summary, params, query, body } = command;
  const path = params as ZodObjectInput | undefined;
  return {
    operationId: id,
    summary,
    description: whoMayCall(command),
    tags: [id.split(".")[0] ?? id],
    security: securityOf(command),
    ...(path || query ? { requestParams: { ...(path && { path }), ...(query && { query }) } } : {}),
    ...parametersOf(command),
    ...(body ? { requestBody: bodyOf(body) } : {}),
    responses: repliesOf(command, refusals),
  };
}

function whoMayCall({ access }: AnyCommand): string {
  if (access.who === "public") return "Asks for no credential.";
  if (access.who === "station") return "For a station's key only.";
  const roles = access.roles.join(", ");
  return access.session
    ? `For ${roles}; in a browser's session only, a key is refused with \`auth.session_required\`.`
    : `For ${roles}.`;
}

function securityOf({ access }: AnyCommand): Record<string, string[]>[] {
  if (access.who === "public") return [];
  if (access.who === "station") return [{ stationKey: [] }];
  return access.session ? [{ session: [] }] : [{ session: [] }, { accessKey: [] }];
}

function parametersOf(command: AnyCommand): Pick<ZodOpenApiOperationObject, "parameters"> {
  const names = [
    ...(command.idempotent ? ["IdempotencyKey"] : []),
    ...(answersRanges(command) ? ["Range", "IfNoneMatch"] : []),
  ];
  return names.length > 0 ? { parameters: names.map((name) => ({ $ref: `#/components/parameters/${name}` })) } : {};
}

function bodyOf(
  body: z.ZodType | { upload: { contentTypes: readonly string[]; maxBytes: number } },
): ZodOpenApiRequestBodyObject {
  if (!isUpload(body)) {
    // An empty body counts as {}.
    return { required: !body.safeParse({}).success, content: { "application/json": { schema: body } } };
  }
  const { contentTypes, maxBytes } = body.upload;
  return {
    required: true,
    description: `At most ${maxBytes.toLocaleString("en")} bytes`,
    content: Object.fromEntries(contentTypes.map((type) => [type, { schema: bytesAs(type) }])),
  };
}
