/**
 * `npm run codegen`: writes db/generated/types.generated.ts from the migrations and the layout's validator from its schema.
 * With --verify it only compares.
 */
import { readFileSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { createTestDatabase, dropTestDatabase, ensureTemplate } from "@/db/test-database";
import { CHECKOUT, PROGRAMS } from "@/lib/commands/checkout";
import { runToEnd } from "@/lib/commands/run-tool";
import { joinTestServer } from "@/lib/commands/test-server";
import { childEnv, findTestServerUrl } from "@/lib/env";
import { layoutValidatorSource } from "@/schemas/documents/validator-source";

const TYPES_FILE = join(CHECKOUT, "db/generated/types.generated.ts");
const VALIDATOR_FILE = join(CHECKOUT, "schemas/documents/layout-validator.generated.ts");
/** The migrator's own tables are nobody's business. bigint, numeric and date stay strings, as db/client.ts reads them. */
const FLAGS = ["--dialect", "postgres", "--camel-case", "--numeric-parser", "string", "--date-parser", "string"];
const SCOPE = ["--default-schema", "public", "--include-pattern", "public.*", "--exclude-pattern", "public.kysely_*"];

export default async function codegen(args: string[], signal: AbortSignal): Promise<number> {
  const verify = args.includes("--verify");
  if (!keepValidator(verify)) return 1;
  const given = findTestServerUrl();
  const server = given === undefined ? await joinTestServer() : { url: given, release: async () => undefined };
  try {
    const template = await ensureTemplate(server.url, CHECKOUT);
    const database = await createTestDatabase(server.url, template);
    try {
      return await generate(database.ownerUrl, verify, signal);
    } finally {
      await dropTestDatabase(server.url, database.name);
    }
  } finally {
    await server.release();
  }
}

/** @returns false where the stored validator is stale and only to be compared. */
function keepValidator(verify: boolean): boolean {
  const source = layoutValidatorSource();
  if (!verify) writeFileSync(VALIDATOR_FILE, source);
  if (readFileSync(VALIDATOR_FILE, "utf8") === source) return true;
  console.error("The layout's validator is stale; run npm run codegen.");
  return false;
}

async function generate(url: string, verify: boolean, signal: AbortSignal): Promise<number> {
  const args = [PROGRAMS.kyselyCodegen, ...FLAGS, ...SCOPE, "--out-file", TYPES_FILE, ...(verify ? ["--verify"] : [])];
  const result = await runToEnd(process.execPath, args, {
    cwd: CHECKOUT,
    env: childEnv({ DATABASE_URL: url }),
    signal,
  });
  if (result.code === 0) {
    console.log(verify ? "The generated types match the migrations." : `Wrote ${TYPES_FILE}`);
    return 0;
  }
  console.error(`${result.stdout}${result.stderr}`.trim());
  console.error(verify ? "The generated types are stale; run npm run codegen." : "The types could not be generated.");
  return result.code;
}
