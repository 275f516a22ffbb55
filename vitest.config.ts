import { availableParallelism } from "node:os";
import { defineConfig } from "vitest/config";

/** Projects by what they need: `unit` runs without a database; the others get a template database from the test command. */
export default defineConfig({
  resolve: { alias: { "@": import.meta.dirname } },
  test: {
    // Tests wait for a database and for programs as much as they compute: two at once even on two cores.
    maxWorkers: Math.max(2, availableParallelism() - 1),
    testTimeout: 20_000,
    hookTimeout: 60_000,
    projects: [
      { extends: true, test: { name: "unit", include: ["tests/unit/**/*.test.ts", "tests/arch/**/*.test.ts"] } },
      { extends: true, test: { name: "reference", include: ["tests/reference/**/*.test.ts"], testTimeout: 60_000 } },
      {
        extends: true,
        test: {
          name: "db",
          include: ["tests/db/**/*.test.ts", "tests/api/**/*.test.ts"],
          globalSetup: ["tests/support/database-template.ts"],
          pool: "forks",
        },
      },
      {
        extends: true,
        test: {
          name: "faults",
          include: ["tests/faults/**/*.test.ts"],
          globalSetup: ["tests/support/built-app.ts", "tests/support/database-template.ts"],
          testTimeout: 120_000,
          hookTimeout: 120_000,
          pool: "forks",
        },
      },
      {
        extends: true,
        test: {
          name: "e2e",
          include: ["tests/e2e/**/*.test.ts"],
          globalSetup: ["tests/support/built-app.ts"],
          testTimeout: 600_000,
          hookTimeout: 300_000,
          pool: "forks",
        },
      },
    ],
  },
});
