/**
 * The shape of a layout document, judged by its JSON Schema. The validator is compiled ahead of time, so that the very same
 * code runs in the browser, whose content security policy forbids compiling there, and on the server.
 */
import type { ErrorObject, ValidateFunction } from "ajv/dist/2020";
import type { Problem } from "@/lib/errors";
import type { LayoutDocument } from "@/schemas/documents/layout";
import { choiceFindings } from "@/schemas/documents/layout-choices";
import { validate as generated } from "@/schemas/documents/layout-validator.generated";

const validate = generated as unknown as ValidateFunction<LayoutDocument>;

/** Every problem of shape with its JSON pointer (code `layout.shape`); none for a layout document. */
export function shapeProblems(json: unknown): Problem[] {
  if (validate(json)) return [];
  const errors = validate.errors ?? [];
  const choices = errors.filter((error) => error.keyword === "oneOf").map((error) => error.instancePath);
  const chosen = choices.flatMap((path) => {
    const own = errors.filter((error) => error.keyword !== "oneOf" && isAt(path, error));
    return choiceFindings(path, valueAt(json, path), own, problemOf).map((one) => ({ code: "layout.shape", ...one }));
  });
  const others = errors.filter((error) => !choices.some((path) => isAt(path, error)));
  return withoutRepeats([...others.map(problemOf), ...chosen]);
}

const isAt = (path: string, { instancePath }: ErrorObject) =>
  instancePath === path || instancePath.startsWith(`${path}/`);

/** The value at a JSON pointer that is known to be there. */
function valueAt(json: unknown, pointer: string): unknown {
  const tokens = pointer.split("/").slice(1);
  return tokens.reduce((value, token) => (value as Record<string, unknown>)[unescapePointer(token)], json);
}

function problemOf(error: ErrorObject): Problem {
  const extra = error.params as ErrorParams;
  const named = extra.additionalProperty ?? extra.missingProperty;
  const path = named === undefined ? error.instancePath : `${error.instancePath}/${escapePointer(named)}`;
  return { path, code: "layout.shape", message: messageOf(error, extra) };
}

/** What ajv says of an error beside its text; each member for some keywords only. */
interface ErrorParams {
  additionalProperty?: string;
  missingProperty?: string;
  allowedValues?: unknown[];
  limit?: number;
}

function messageOf(error: ErrorObject, extra: ErrorParams): string {
  if (extra.additionalProperty !== undefined) return `“${extra.additionalProperty}” is not known here`;
  if (extra.missingProperty !== undefined) return `“${extra.missingProperty}” is missing`;
  if (extra.allowedValues !== undefined) return `must be one of ${extra.allowedValues.join(", ")}`;
  if (error.keyword === "minItems") return `needs at least ${extra.limit}`;
  if (error.keyword === "maxItems") return `takes at most ${extra.limit}`;
  return error.message ?? "is not valid";
}

/** Branches of a choice often complain of the same thing. */
function withoutRepeats(problems: readonly Problem[]): Problem[] {
  const seen = new Set<string>();
  return problems.filter(({ path, message }) => !seen.has(path + message) && seen.add(path + message));
}

const unescapePointer = (token: string) => token.replaceAll("~1", "/").replaceAll("~0", "~");

/** RFC 6901, section 3: `~` and `/` are escaped. */
function escapePointer(token: string): string {
  return token.replaceAll("~", "~0").replaceAll("/", "~1");
}
