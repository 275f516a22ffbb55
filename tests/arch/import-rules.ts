/** Who may import whom: the table of DEVELOPERS.md as data. The longest area that holds a file decides. */
import { type Import, isWithin, type SourceFile } from "./source-files";

export interface Rule {
  /** Folders or files whose content the rule is for. */
  area: string;
  /** What of ours may be imported besides the area itself; undefined for anything that `never` does not name. */
  ours?: readonly string[];
  /** What of ours may be imported as types only. */
  types?: readonly string[];
  /** Packages that may be imported; undefined for anything that `never` does not name. A trailing / means all below. */
  packages?: readonly string[];
  never?: readonly string[];
}

const WEB = ["next", "next/", "next-auth", "next-auth/", "react", "react-dom"];
const DATABASE = ["kysely", "pg", "pg-boss"];

export const RULES: readonly Rule[] = [
  { area: "lib/errors", ours: [], packages: [] },
  { area: "lib/env", ours: ["lib/errors"], packages: ["zod", "node:"] },
  { area: "lib/process-state", ours: [], packages: ["node:"] },
  { area: "lib/log", ours: ["lib/env"], packages: ["pino"] },
  { area: "lib/domain", ours: ["lib/errors"], types: ["schemas"], packages: ["semver", "canonicalize"] },
  // Reading a CSV or a workbook is a pure function of its bytes, with parsers and a UTF-8 test that are not ours.
  {
    area: "lib/domain/readings",
    ours: ["lib/domain", "lib/errors"],
    types: ["schemas"],
    packages: ["csv-parse/sync", "csv-parse/browser/esm/sync", "jszip", "saxes", "node:buffer"],
  },
  {
    area: "builders",
    ours: ["lib/domain", "lib/errors"],
    types: ["schemas"],
    packages: ["intel-hex", "jszip", "semver", "node:crypto", "node:zlib"],
  },
  // The codec also runs in the browser, where Node's modules are not.
  { area: "builders/codec", ours: ["lib/domain", "lib/errors"], types: ["schemas"], packages: ["semver"] },
  { area: "schemas", ours: ["lib/errors", "lib/domain"], never: [...WEB, ...DATABASE, "node:"] },
  {
    area: "db",
    ours: ["lib/errors", "lib/env", "lib/process-state"],
    types: ["lib/domain", "schemas"],
    packages: ["kysely", "pg", "node:"],
  },
  // Migrating is where the database meets what lives in it: its migrations and its job queues.
  {
    area: "db/migrate",
    ours: ["db", "migrations", "lib/errors", "lib/jobs/queues"],
    packages: ["kysely", "pg", "pg-boss"],
  },
  { area: "migrations", ours: [], packages: ["kysely"] },
  {
    area: "lib/services",
    ours: [
      "lib/domain",
      "builders",
      "db",
      "schemas",
      "lib/errors",
      "lib/env",
      "lib/mail",
      "lib/jobs",
      "lib/auth/password",
    ],
    never: WEB,
  },
  {
    area: "lib/mail",
    ours: ["lib/domain", "lib/errors", "lib/env"],
    types: ["db", "schemas"],
    never: [...WEB, ...DATABASE],
  },
  { area: "lib/jobs", ours: ["lib/domain", "lib/errors", "lib/env"], types: ["db", "schemas"], never: WEB },
  {
    area: "lib/auth",
    ours: ["lib/services", "lib/http", "lib/domain", "lib/errors", "lib/env", "lib/log", "schemas", "db/client"],
    types: ["db"],
    never: ["db/queries"],
  },
  {
    area: "lib/http",
    // The boundary turns what the database refused into the product's codes.
    ours: [
      "lib/services",
      "lib/auth",
      "lib/domain",
      "lib/errors",
      "lib/env",
      "lib/log",
      "schemas",
      "db/client",
      "db/constraint-codes",
      "package.json", // the version that health and OpenAPI tell
    ],
    types: ["db"],
    never: ["db/queries"],
  },
  {
    area: "lib/station",
    ours: ["lib/domain", "builders", "schemas", "lib/errors", "lib/env"],
    never: [...WEB, ...DATABASE],
  },
  { area: "lib/commands", never: ["app", "tests"] },
  { area: "lib/demo", never: ["app", "tests"] },
  {
    area: "app",
    ours: ["lib/services", "lib/http", "lib/auth", "lib/domain", "lib/errors", "lib/env", "schemas", "builders/codec"],
    never: ["db", "builders/bundle", ...DATABASE],
  },
  { area: "tests" },
];

/** In a file that begins with "use client": what reaches the browser is types and pure code. */
const CLIENT: Rule = {
  area: "app",
  ours: ["schemas", "lib/domain", "lib/errors", "builders/codec"],
  types: ["lib", "schemas", "builders"],
  never: ["node:", ...DATABASE, "next-auth", "@node-rs/", "pino"],
};

/** Breaches of a file, one line each: `file → what it imports`. */
export function breachesOf(file: SourceFile): string[] {
  const rules = [ruleFor(file.path), ...(isClientFile(file) ? [CLIENT] : [])];
  return file.imports
    .filter((wanted) => rules.some((rule) => rule !== undefined && !isAllowed(wanted, rule)))
    .map((wanted) => `${file.path} → ${wanted.target}${wanted.typeOnly ? " (types)" : ""}`);
}

function isClientFile(file: SourceFile): boolean {
  return /^\s*["']use client["']/.test(file.code);
}

/** The rule of the longest area around a path. */
export function ruleFor(path: string): Rule | undefined {
  return RULES.filter((rule) => isWithin(path, rule.area)).sort((a, b) => b.area.length - a.area.length)[0];
}

function isAllowed(wanted: Import, rule: Rule): boolean {
  const named = (list: readonly string[]) =>
    list.some((name) => (wanted.isOurs ? isWithin(wanted.target, name) : isPackage(wanted.target, name)));
  if (wanted.typeOnly && wanted.isOurs && named(rule.types ?? [])) return true;
  if (named(rule.never ?? [])) return false;
  const may = wanted.isOurs ? rule.ours : rule.packages;
  return may === undefined || (wanted.isOurs && isWithin(wanted.target, rule.area)) || named(may);
}

function isPackage(name: string, listed: string): boolean {
  return name === listed || ((listed.endsWith("/") || listed.endsWith(":")) && name.startsWith(listed));
}
