import { describe, expect, it } from "vitest";
import { breachesOf, ruleFor } from "./import-rules";
import { findImports, isThere, readSourceFiles, type SourceFile, stripComments } from "./source-files";

/** Its examples below look like imports to a reader that knows no strings. */
const THIS_FILE = "tests/arch/imports.test.ts";
const files = readSourceFiles().filter(({ path }) => path !== THIS_FILE);

function fileWith(path: string, code: string): SourceFile {
  return { path, code, imports: findImports(code, path) };
}

describe("imports", () => {
  it("keep to the table of who may import whom", () => {
    expect(files.flatMap(breachesOf)).toEqual([]);
  });

  it("name files that are there", () => {
    const lost = files.flatMap((file) =>
      file.imports
        .filter(({ isOurs, target }) => isOurs && !isThere(target))
        .map(({ target }) => `${file.path} → ${target}`),
    );
    expect(lost).toEqual([]);
  });

  it("come from a folder with a rule", () => {
    const folders = files.filter((file) => file.path.includes("/") && ruleFor(file.path) === undefined);
    expect(folders.map((file) => file.path)).toEqual([]);
  });

  it("carry no file extension, save in the dispatcher of commands", () => {
    const named = files.flatMap((file) =>
      file.imports.filter(({ isOurs, target }) => isOurs && /\.tsx?$/.test(target)).map(() => file.path),
    );
    expect(named).toEqual([]);
  });
});

describe("the rules themselves", () => {
  it.each([
    ["lib/domain/fit.ts", 'import { Kysely } from "kysely";'],
    ["lib/domain/fit.ts", 'import { readFileSync } from "node:fs";'],
    ["lib/domain/fit.ts", 'import { x } from "@/db/client";'],
    ["lib/domain/fit.ts", 'import { parse } from "csv-parse/sync";'],
    ["lib/domain/readings/x.ts", 'import { readFileSync } from "node:fs";'],
    ["lib/domain/compensation/fit.ts", 'import { x } from "../../../schemas/api/lots";'],
    ["builders/codec/crc.ts", 'import { createHash } from "node:crypto";'],
    ["builders/bundle/zip.ts", 'import { stat } from "node:fs/promises";'],
    ["schemas/api/lots.ts", 'import { x } from "next/server";'],
    ["db/queries/lots.ts", 'import { x } from "@/lib/services/lots/create-lot";'],
    ["db/queries/lots.ts", 'import { fitLine } from "@/lib/domain/compensation/fit";'],
    ["migrations/1_x.ts", 'import { x } from "@/db/roles";'],
    ["lib/services/lots/x.ts", 'import { headers } from "next/headers";'],
    ["lib/http/route.ts", 'import { x } from "@/db/queries/lots";'],
    ["lib/station/agent.ts", 'import pg from "pg";'],
    ["lib/commands/x.ts", 'import Page from "@/app/page";'],
    ["app/page.tsx", 'import { getDb } from "@/db/client";'],
    ["app/page.tsx", 'import { sql } from "kysely";'],
    ["app/page.tsx", 'const zip = await import("@/builders/bundle/zip");'],
    ["app/a.tsx", '"use client";\nimport { x } from "@/lib/services/lots/create-lot";'],
  ])("refuse in %s: %s", (path, code) => {
    expect(breachesOf(fileWith(path, code))).toHaveLength(1);
  });

  it.each([
    ["lib/domain/fit.ts", 'import type { Layout } from "@/schemas/documents/layout";'],
    ["lib/domain/readings/x.ts", 'import { parse } from "csv-parse/sync";'],
    ["builders/bundle/zip.ts", 'import JSZip from "jszip";'],
    ["db/queries/lots.ts", 'import type { Role } from "@/lib/domain/roles";'],
    ["db/migrate.ts", 'import { migrations } from "@/migrations/index";'],
    ["app/page.tsx", 'import { listLots } from "@/lib/services/lots/list-lots";'],
    ["app/a.tsx", '"use client";\nimport type { Lot } from "@/lib/services/lots/create-lot";'],
  ])("allow in %s: %s", (path, code) => {
    expect(breachesOf(fileWith(path, code))).toEqual([]);
  });

  it("see through comments, keep addresses", () => {
    expect(stripComments('const a = "http://x"; // import "pg"\n/* import "next" */ b')).toBe(
      'const a = "http://x"; \n b',
    );
  });
});
