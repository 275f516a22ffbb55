import { NextRequest } from "next/server";
import { describe, expect, it } from "vitest";
import { proxy } from "@/proxy";

/** A header that the page behind the proxy gets; Next carries it so. */
function handedOn(path: string, headers: Record<string, string>, name: string): string | null {
  const response = proxy(new NextRequest(`http://127.0.0.1:3000${path}`, { headers }));
  return response.headers.get(`x-middleware-request-${name}`);
}

describe("the proxy in front of pages", () => {
  it("tells a page its own path, and never what a client says it is", () => {
    expect(handedOn("/lots/A?sort=-x&_rsc=1a2b", {}, "x-path")).toBe("/lots/A?sort=-x");
    expect(handedOn("/lots", { "x-path": "//elsewhere.example" }, "x-path")).toBe("/lots");
  });

  it("makes a nonce for each request, over one that a client sends", () => {
    const [first, second] = ["one", "two"].map((nonce) => handedOn("/lots", { "x-nonce": nonce }, "x-nonce"));
    expect(first).not.toBe(second);
    expect(["one", "two"]).not.toContain(first);
    const policy = proxy(new NextRequest("http://127.0.0.1:3000/lots")).headers.get("content-security-policy");
    expect(policy).toMatch(/script-src 'self' 'nonce-[\w+/=]+' 'strict-dynamic'/);
    expect(policy).toContain("frame-ancestors 'none'");
  });
});
