/**
 * Findings about the members of a layout document that can have one of several shapes. A validator complains of every shape
 * that the value hasn't; a person wants to hear what is wrong with the one that was meant.
 */
import type { ErrorObject } from "ajv/dist/2020";
import type { Problem } from "@/lib/errors";

type Loose = Record<string, unknown>;
type Finding = Pick<Problem, "path" | "message">;

interface Shape {
  /** Names of the members that only this shape has. */
  marks: readonly string[];
  /** Its place among the schema's `oneOf`. */
  branch: number;
  words: string;
}

interface Choice {
  what: string;
  shapes: readonly Shape[];
  /** Place in `oneOf` of the shape that is a text, where there is one. */
  text?: { branch: number; words: string };
}

const CRC_MEMBERS = ["width", "poly", "init", "refin", "refout", "xorout"];

const ALGORITHM: Choice = {
  what: "an algorithm",
  text: { branch: 0, words: "the name of a CRC such as “CRC-16/IBM-3740”" },
  shapes: [
    { marks: CRC_MEMBERS, branch: 1, words: "a CRC by “width”, “poly”, “init”, “refin”, “refout” and “xorout”" },
    { marks: ["sum"], branch: 2, words: "{“sum”: 8, 16 or 32}" },
    { marks: ["xor"], branch: 3, words: "{“xor”: 8}" },
  ],
};

const VALUE: Choice = {
  what: "a value",
  shapes: [
    { marks: ["from"], branch: 0, words: "{“from”: a source}" },
    { marks: ["const"], branch: 1, words: "{“const”: a number, text or list}" },
    { marks: ["bits"], branch: 2, words: "{“bits”: a list of parts}" },
  ],
};

/**
 * What is wrong with the value of a choice, in place of the errors of all its shapes.
 * @param path JSON pointer of the choice.
 * @param errors those of the validator at that place and below it.
 * @param describe words for one error of the shape that was meant.
 */
export function choiceFindings(
  path: string,
  value: unknown,
  errors: readonly ErrorObject[],
  describe: (error: ErrorObject) => Finding,
): Finding[] {
  if (path.endsWith("/over")) return coveredFindings(path, value, errors, describe);
  const choice = path.endsWith("/algorithm") ? ALGORITHM : VALUE;
  const meant = branchMeant(choice, value);
  if (typeof meant === "string") return [{ path, message: meant }];
  const own = errors.filter((error) => [undefined, meant].includes(branchOf(error)));
  const missing = own.filter((error) => error.keyword === "required" && error.instancePath === path);
  const listedAt = new Set(own.filter((error) => error.keyword === "enum").map((error) => error.instancePath));
  // What is none of the values is of no right kind either.
  const repeats = (error: ErrorObject) => error.keyword === "type" && listedAt.has(error.instancePath);
  const rest = own.filter((error) => !missing.includes(error) && !repeats(error));
  const findings = rest.map((error) => inWords(path, value, error) ?? describe(error));
  return missing.length > 1
    ? [{ path, message: lacking(missing) }, ...findings]
    : [...missing.map(describe), ...findings];
}

/** The branch of the schema that a value is meant for, or what stands against its being meant for one. */
function branchMeant({ what, shapes, text }: Choice, value: unknown): number | string {
  const all = [...(text ? [text.words] : []), ...shapes.map((shape) => shape.words)];
  const instead = `${what} is ${listed(all, "or")}`;
  if (typeof value === "string" && text) return text.branch;
  if (!isLoose(value)) return `${instead}, not ${JSON.stringify(value)}`;
  const meant = shapes.filter(({ marks }) => marks.some((mark) => Object.hasOwn(value, mark)));
  const names = Object.keys(value).map((name) => `“${name}”`);
  if (meant.length === 1) return (meant[0] as Shape).branch;
  if (meant.length > 1) return `${listed(names, "and")} do not go together: ${instead}`;
  return names.length === 0
    ? `nothing stands here: ${instead}`
    : `${listed(names, "and")} ${names.length === 1 ? "is" : "are"} not known here: ${instead}`;
}

/** One range, or a list of ranges: the second where its first item is a list. */
function coveredFindings(
  path: string,
  value: unknown,
  errors: readonly ErrorObject[],
  describe: (error: ErrorObject) => Finding,
): Finding[] {
  if (Array.isArray(value) && Array.isArray(value[0])) {
    const depth = path.split("/").length;
    const isInner = ({ instancePath, schemaPath }: ErrorObject) =>
      // Read as one range, its items would have to be numbers.
      instancePath.split("/").length > depth + 1 || (instancePath !== path && !schemaPath.includes("/range/items/"));
    const inner = errors.filter(isInner);
    const own = [...errors.filter((error) => branchOf(error) === 1), ...inner];
    if (own.length > 0) return own.map(describe);
  }
  return [{ path, message: "“over” must be a range [from, to], both whole numbers from 0, or a list of such ranges" }];
}

/** The place in `oneOf` that an error comes from; undefined for one from a definition that shapes refer to. */
function branchOf({ schemaPath }: ErrorObject): number | undefined {
  const found = /\/oneOf\/(\d+)\//.exec(schemaPath)?.[1];
  return found === undefined ? undefined : Number(found);
}

/** Words for a member of the shape that holds what it can't. */
function inWords(path: string, value: unknown, error: ErrorObject): Finding | undefined {
  const name = error.instancePath.slice(path.length + 1);
  if (name === "" || name.includes("/") || !isLoose(value)) return undefined;
  const now = JSON.stringify(value[name]);
  const must = (what: string) => ({ path: error.instancePath, message: `“${name}” must be ${what}, not ${now}` });
  const { keyword, params } = error;
  if (keyword === "enum" && params.allowedValues.length <= 4) return must(listed(params.allowedValues, "or"));
  if (keyword === "enum") return undefined;
  if (name === "const" && keyword === "type") return must("a number, a text or a list of them");
  if (params.type === "boolean") return must("true or false");
  if (CRC_MEMBERS.includes(name) && (keyword === "pattern" || params.type === "string")) {
    return must("1 to 8 hex digits in quotes");
  }
  return undefined;
}

function lacking(missing: readonly ErrorObject[]): string {
  const names = missing.map(({ params }) => `“${params.missingProperty}”`);
  return `${listed(names, "and")} are missing`;
}

function listed(items: readonly unknown[], word: "and" | "or"): string {
  const texts = items.map(String);
  return texts.length < 2 ? texts.join("") : `${texts.slice(0, -1).join(", ")} ${word} ${texts.at(-1)}`;
}

const isLoose = (value: unknown): value is Loose =>
  typeof value === "object" && value !== null && !Array.isArray(value);
