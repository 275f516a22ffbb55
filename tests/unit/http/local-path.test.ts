import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { HOME_PATH, localPath } from "@/lib/domain/local-path";

describe("a path to come back to", () => {
  it.each(["/today", "/lots/MW20-2609?sort=-gainTc&show=live#devices", "/trace/A.B_C", "/apiary", "/sign-inquiry"])(
    "is kept: %s",
    (path) => expect(localPath(path)).toBe(path),
  );

  it.each([
    undefined,
    null,
    "",
    "lots",
    "https://elsewhere.example/",
    "//elsewhere.example/x",
    "///elsewhere.example",
    "/\\elsewhere.example",
    "/\t/elsewhere.example",
    "/\n/elsewhere.example",
    "/.//elsewhere.example",
    "/lots/..//elsewhere.example",
    "\\\\elsewhere.example",
    "javascript:alert(1)",
    " /lots",
    "/api/v1/lots",
    "/api",
    "/sign-in?back=/lots",
    "/x/../sign-in",
  ])("is the first page instead of %j", (given) => expect(localPath(given)).toBe(HOME_PATH));

  it("never leaves the site, whatever comes", () => {
    const base = "https://trim.example";
    const odd = fc.string({
      unit: fc.constantFrom("/", "\\", ".", "\t", "\n", "@", ":", "?", "#", "%", "a", "é", " "),
    });
    fc.assert(
      fc.property(fc.oneof(odd, fc.webUrl(), fc.string()), (given) => {
        for (const path of [localPath(given), localPath(`/${given}`)]) {
          expect(new URL(path, base).origin).toBe(base);
          expect(localPath(path)).toBe(path);
        }
      }),
    );
  });
});
