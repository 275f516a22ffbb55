import { describe, expect, it } from "vitest";
import { listTopLevel, readSourceFiles } from "./source-files";

const files = readSourceFiles();

const TOP_LEVEL = [
  ...["app", "lib", "schemas", "builders", "db", "migrations", "tests", "README.md", "DEVELOPERS.md"],
  ...["package.json", "package-lock.json", "tsconfig.json", "next.config.mjs", "tailwind.config.ts"],
  // What the tools look for at the top and nowhere else.
  ...["postcss.config.mjs", "biome.json", "vitest.config.ts", "proxy.ts", "instrumentation.ts"],
  ...[".npmrc", ".gitignore", ".gitattributes", ".ci"],
];

describe("the checkout", () => {
  it("holds nothing at its top but the agreed names", () => {
    expect(listTopLevel().filter((name) => !TOP_LEVEL.includes(name))).toEqual([]);
  });

  it("has no file or folder that says nothing", () => {
    const vague = /(^|\/)(utils?|helpers?|misc|common-stuff)(\/|\.|$)/;
    const barrel = (path: string) => /(^|\/)index\.tsx?$/.test(path) && path !== "migrations/index.ts";
    expect(files.map((file) => file.path).filter((path) => vague.test(path) || barrel(path))).toEqual([]);
  });
});

describe("code", () => {
  it("reads the environment in lib/env.ts only", () => {
    // NODE_ENV is no setting: the builder replaces it by a constant.
    const reads = (code: string) => /process\.env(?!\.NODE_ENV)/.test(code);
    const readers = files
      .filter((file) => !file.path.startsWith("tests/") && reads(file.code))
      .map((file) => file.path);
    expect(readers).toEqual(["lib/env.ts"]);
  });

  it("that is pure asks no clock and no chance", () => {
    const impure = /\bDate\.now\(|\bnew Date\(\)|\bMath\.random\(|\brandomUUID\(|\brandomBytes\(|\bperformance\.now\(/;
    const pure = files.filter((file) => /^(lib\/domain|builders|schemas)\//.test(file.path));
    expect(pure.length).toBeGreaterThan(0);
    expect(pure.filter((file) => impure.test(file.code)).map((file) => file.path)).toEqual([]);
  });

  it("of migrations keeps to its list, in order", async () => {
    const { migrations } = await import("@/migrations/index");
    const written = files
      .map((file) => /^migrations\/(\d.*)\.ts$/.exec(file.path)?.[1])
      .filter((name) => name !== undefined);
    expect(Object.keys(migrations)).toEqual(written.sort());
  });
});
