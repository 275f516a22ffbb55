import { defineConfig } from "vitest/config";

/** Projects by what they need: `unit` runs without a database; the others get a template database from the test command. */
export default defineConfig({
  resolve: { alias: { "@": import.meta.dirname } },
  test: {
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
        test: { name: "faults", include: ["tests/faults/**/*.test.ts"], testTimeout: 120_000, pool: "forks" },
      },
      {
        extends: true,
        test: {
          name: "e2e",
          include: ["tests/e2e/**/*.test.ts"],
          testTimeout: 600_000,
          hookTimeout: 300_000,
          pool: "forks",
        },
      },
    ],
  },
});
