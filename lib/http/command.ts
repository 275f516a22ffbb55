import type { z } from "zod";
import type { Role } from "@/lib/domain/roles";
import type { Ctx, PersonCtx, StationCtx } from "@/lib/services/context";

/**
 * Who may call. A person's bearer key reads and does an engineer's work; `session: true` refuses even that, because decisions
 * are made by a person in a browser. `reads: true` marks a call that changes nothing although its method could.
 */
export type Access =
  | { who: "public" }
  | { who: "person"; roles: readonly Role[]; session?: boolean; reads?: boolean }
  | { who: "station" };

type CtxOf<A extends Access> = A extends { who: "person" }
  ? PersonCtx
  : A extends { who: "station" }
    ? StationCtx
    : Ctx;

/** A body that is not JSON: its bytes, bounded. */
export interface UploadBody {
  upload: { contentTypes: readonly string[]; maxBytes: number };
}

/** The bytes of an upload as received and its content type without parameters. */
export interface Upload {
  bytes: Buffer;
  contentType: string;
}

type BodyOf<B> = B extends z.ZodType ? z.output<B> : B extends UploadBody ? Upload : undefined;
type OutputOf<T> = T extends z.ZodType ? z.output<T> : Record<string, never>;
type ReplyOf<R> = R extends z.ZodType ? z.input<R> | Response : Response;

export interface CommandInput<P, Q, B> {
  params: OutputOf<P>;
  query: OutputOf<Q>;
  body: BodyOf<B>;
  /** For content negotiation, ranges and conditional requests. */
  headers: Headers;
}

/**
 * One thing the product does, told once: the route handler, the server action, the OpenAPI document and the permission test
 * are all made from it.
 */
export interface Command<
  A extends Access = Access,
  P extends z.ZodType | undefined = z.ZodType | undefined,
  Q extends z.ZodType | undefined = z.ZodType | undefined,
  B extends z.ZodType | UploadBody | undefined = z.ZodType | UploadBody | undefined,
  R extends z.ZodType | undefined = z.ZodType | undefined,
> {
  /** `noun.verb`, also the OpenAPI operation id. */
  id: string;
  method: "GET" | "POST" | "PUT" | "PATCH" | "DELETE";
  /** Below `/api/v1`, parameters as `{name}`. */
  path: string;
  summary: string;
  access: A;
  params?: P;
  query?: Q;
  body?: B;
  /** Status of success and the schema of its JSON; where other media types are offered, the handler returns a Response itself. */
  reply: { status: number; schema?: R; mediaTypes?: readonly string[]; description?: string };
  /** Codes a caller should be ready for, besides those every call has. */
  errors?: readonly string[];
  /** Takes an `Idempotency-Key`: calls that create. */
  idempotent?: boolean;
  handle: (ctx: CtxOf<A>, input: CommandInput<P, Q, B>) => Promise<ReplyOf<R>>;
}

/** A command whose parts are known only at run time. */
// biome-ignore lint/suspicious/noExplicitAny: variance of handle; every use goes through the schemas.
export type AnyCommand = Command<any, any, any, any, any>;

/** Types a command from its parts. */
export function command<
  const A extends Access,
  P extends z.ZodType | undefined = undefined,
  Q extends z.ZodType | undefined = undefined,
  B extends z.ZodType | UploadBody | undefined = undefined,
  R extends z.ZodType | undefined = undefined,
>(definition: Command<A, P, Q, B, R>): Command<A, P, Q, B, R> {
  return definition;
}

/** @returns whether a body schema is an upload. */
export function isUpload(body: unknown): body is UploadBody {
  return typeof body === "object" && body !== null && "upload" in body;
}
