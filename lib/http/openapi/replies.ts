import type {
  oas31,
  ZodOpenApiComponentsObject,
  ZodOpenApiResponseObject,
  ZodOpenApiResponsesObject,
} from "zod-openapi";
import { statusOf } from "@/lib/errors";
import { type AnyCommand, isUpload } from "../command";

type SchemaObject = oas31.SchemaObject;
type Headers = NonNullable<ZodOpenApiResponseObject["headers"]>;
type Content = NonNullable<Exclude<ZodOpenApiResponsesObject["200"], { $ref: string } | undefined>["content"]>;

/** Whether a call answers exact bytes: with ETag and Repr-Digest, by ranges, and 304 where the client has them. */
export function answersRanges(command: AnyCommand): boolean {
  return command.errors?.includes("request.range_invalid") === true;
}

/** Every reply of a call by status: what it promises, then its refusals. */
export function repliesOf(command: AnyCommand, refusals: Refusals): ZodOpenApiResponsesObject {
  const { status, description } = command.reply;
  const content = contentOf(command);
  const success: ZodOpenApiResponseObject = {
    description: description ?? command.summary,
    ...(Object.keys(content).length > 0 ? { content } : {}),
    ...(answersRanges(command) ? { headers: BYTE_HEADERS } : {}),
    ...(command.idempotent ? { headers: REPLAY_HEADER } : {}),
  };
  const replies: ZodOpenApiResponsesObject = { [String(status) as "200"]: success };
  if (answersRanges(command)) {
    replies["206"] = { ...success, description: "The range that was asked for" };
    replies["304"] = { description: "The client has these bytes" };
  }
  return { ...replies, ...refusalsOf(command, refusals) };
}

const BYTE_HEADERS: Headers = {
  ETag: { schema: { type: "string" }, description: "Strong; for If-None-Match and If-Range" },
  "Repr-Digest": { schema: { type: "string" }, description: "SHA-256 of the whole (RFC 9530)" },
};
const REPLAY_HEADER: Headers = {
  "Idempotency-Replayed": {
    schema: { type: "string", enum: ["true"] },
    description: "There where the reply of the first call with this key is given again",
  },
};

function contentOf(command: AnyCommand): Content {
  const { schema, mediaTypes } = command.reply;
  const content: Content = {};
  for (const type of mediaTypes ?? (schema ? ["application/json"] : [])) content[type] = { schema: bytesAs(type) };
  if (schema) content["application/json"] = { schema };
  return content;
}

/** Bytes have no JSON type: in OpenAPI 3.1 a schema without one stands for them. Text is a string. */
export function bytesAs(mediaType: string): { type?: "string" | "object"; contentMediaType?: string } {
  if (mediaType.endsWith("json")) return { type: "object" };
  return mediaType.startsWith("text/") ? { type: "string" } : { contentMediaType: mediaType };
}

/** Names refusals once each, so that calls which refuse alike share one. */
export class Refusals {
  readonly responses: NonNullable<ZodOpenApiComponentsObject["responses"]> = {};
  readonly #names = new Map<string, string>();

  /** Reference to a refusal with these codes of one status. */
  refOf(status: number, codes: readonly string[]): { $ref: string } {
    const key = [...codes].sort().join(" ");
    const name = this.#names.get(key) ?? this.#add(key, status, codes);
    return { $ref: `#/components/responses/${name}` };
  }

  #add(key: string, status: number, codes: readonly string[]): string {
    const alike = Object.keys(this.responses).filter((name) => name.startsWith(`Refused${status}`)).length;
    const name = `Refused${status}${alike === 0 ? "" : `-${alike + 1}`}`;
    this.#names.set(key, name);
    this.responses[name] = refusal(codes);
    return name;
  }
}

/** Codes are examples, not an enumeration: new ones may come, and clients go by the status then. */
function refusal(codes: readonly string[]): ZodOpenApiResponseObject {
  const description = codes.map((code) => `\`${code}\`: ${statusOf(code).title}`).join("\n\n");
  const code: SchemaObject = { type: "string", examples: [...codes] };
  const schema: SchemaObject = {
    allOf: [{ $ref: "#/components/schemas/Problem" }, { type: "object", properties: { code } }],
  };
  return { description, content: { "application/problem+json": { schema } } };
}

function refusalsOf(command: AnyCommand, refusals: Refusals): ZodOpenApiResponsesObject {
  const byStatus = new Map<number, string[]>();
  for (const code of new Set([...commonCodes(command), ...(command.errors ?? [])])) {
    const { status } = statusOf(code);
    byStatus.set(status, [...(byStatus.get(status) ?? []), code]);
  }
  const entries = [...byStatus].sort(([a], [b]) => a - b);
  return Object.fromEntries(entries.map(([status, codes]) => [String(status), refusals.refOf(status, codes)]));
}

/** What every call of its kind may answer, whatever it does. */
function commonCodes(command: AnyCommand): string[] {
  const { access, params, query, body, idempotent, method, errors = [] } = command;
  const codes = ["server.fault", "database.unavailable"];
  if (access.who !== "public") codes.push("auth.required", "auth.forbidden");
  if (access.who === "person" && method !== "GET") codes.push("auth.origin_mismatch");
  if (access.session) codes.push("auth.session_required");
  if (params || query || (body && !isUpload(body))) codes.push("request.invalid");
  if (body) codes.push("request.too_large", "request.unsupported_type", "request.cut_short");
  if (body && !isUpload(body)) codes.push("request.malformed");
  if (idempotent) codes.push("idempotency.key_reused", "idempotency.in_progress");
  if (errors.some((code: string) => code === "auth.password_wrong")) codes.push("auth.too_many_attempts");
  return codes;
}
