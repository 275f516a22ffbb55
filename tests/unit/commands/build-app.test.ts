import { cpSync, mkdirSync, mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { dirname, join } from "node:path";
import { afterAll, beforeEach, describe, expect, it } from "vitest";
import { ensureBuild, markServed, sourceHash } from "@/lib/commands/build-app";
import { CHECKOUT } from "@/lib/commands/checkout";
import { setEnv } from "@/lib/env";

const folder = mkdtempSync(join(tmpdir(), "trimwright-build-"));
const FILES = {
  "app/page.tsx": "export default function Page() {}",
  "lib/domain/fit.ts": "export const fit = 1;",
  "lib/commands/start.ts": "export default 1;",
  "tests/unit/fit.test.ts": "test",
  "next.config.mjs": "export default {};",
  "package-lock.json": "{}",
  "proxy.ts": "export const proxy = 1;",
  "README.md": "A job in one paragraph.",
};
let checkout = "";
let count = 0;

function write(name: string, content: string): void {
  mkdirSync(dirname(join(checkout, name)), { recursive: true });
  writeFileSync(join(checkout, name), content);
}

beforeEach(() => {
  count += 1;
  checkout = join(folder, String(count));
  for (const [name, content] of Object.entries(FILES)) write(name, content);
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

describe("the hash of what is built", () => {
  it("is the same for the same files in another folder", () => {
    const copy = join(folder, `copy-${count}`);
    cpSync(checkout, copy, { recursive: true });
    expect(sourceHash(copy)).toBe(sourceHash(checkout));
  });

  it.each([["app/page.tsx"], ["lib/domain/fit.ts"], ["next.config.mjs"], ["package-lock.json"], ["proxy.ts"]])(
    "changes with %s",
    (name) => {
      const before = sourceHash(checkout);
      write(name, "export const other = 2;");
      expect(sourceHash(checkout)).not.toBe(before);
    },
  );

  it("changes when a page is added, renamed or taken away", () => {
    const hashes = [sourceHash(checkout)];
    write("app/lots/page.tsx", "x");
    hashes.push(sourceHash(checkout));
    rmSync(join(checkout, "app/lots"), { recursive: true });
    write("app/lot/page.tsx", "x");
    hashes.push(sourceHash(checkout));
    expect(new Set(hashes).size).toBe(3);
  });

  it.each([["lib/commands/start.ts"], ["tests/unit/fit.test.ts"], ["README.md"], ["lib/demo/seed.ts"], ["x.log"]])(
    "stays with a change of %s, which is in no page",
    (name) => {
      const before = sourceHash(checkout);
      write(name, "export const other = 2;");
      expect(sourceHash(checkout)).toBe(before);
    },
  );
});

describe("a build", () => {
  it("of changed files is refused while a process serves the one before", async () => {
    const dist = `.local-test/unit-served-${process.pid}`;
    setEnv({ TRIMWRIGHT_DIST_DIR: dist });
    const served = markServed();
    try {
      await expect(ensureBuild({ say: () => undefined })).rejects.toMatchObject({
        code: "app.build_served",
        details: { pid: process.pid },
        message: `The sources changed, but process ${process.pid} still serves the app built before; stop it first`,
      });
    } finally {
      served.release();
      rmSync(join(CHECKOUT, ".local", `served-${dist.replaceAll("/", "-")}`), { recursive: true });
    }
  });

  it("is not repeated for the files that it was made from", async () => {
    const dist = `.local-test/unit-build-${process.pid}`;
    setEnv({ TRIMWRIGHT_DIST_DIR: dist });
    mkdirSync(join(CHECKOUT, dist), { recursive: true });
    writeFileSync(join(CHECKOUT, dist, "source-hash"), sourceHash(CHECKOUT));
    const said: string[] = [];
    try {
      await expect(ensureBuild({ say: (line) => said.push(line) })).resolves.toBe(false);
      expect(said).toEqual([]);
    } finally {
      rmSync(join(CHECKOUT, dist), { recursive: true, force: true });
    }
  });
});
