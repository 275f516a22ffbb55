/** The folder that this code lies in. */
import { join } from "node:path";

export const CHECKOUT = join(import.meta.dirname, "../..");

/** Path of a program that an npm package brings, run with Node itself: no shell, no lookup. */
export const PROGRAMS = {
  next: join(CHECKOUT, "node_modules/next/dist/bin/next"),
  vitest: join(CHECKOUT, "node_modules/vitest/vitest.mjs"),
  tsc: join(CHECKOUT, "node_modules/typescript/bin/tsc"),
  biome: join(CHECKOUT, "node_modules/@biomejs/biome/bin/biome"),
  kyselyCodegen: join(CHECKOUT, "node_modules/kysely-codegen/dist/cli/bin.js"),
  bootstrap: join(CHECKOUT, "lib/commands/bootstrap.mjs"),
  /** Loaded before Next's server. */
  tellLength: join(CHECKOUT, "lib/commands/tell-length.mjs"),
} as const;
