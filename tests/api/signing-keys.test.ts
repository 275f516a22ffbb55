import { createHash, createPublicKey, generateKeyPairSync } from "node:crypto";
import { readFileSync, rmSync, writeFileSync } from "node:fs";
import { beforeAll, describe, expect, it } from "vitest";
import { signingKeyFile } from "@/lib/env";
import { ensureSigningKey } from "@/lib/services/signing-keys/current-signing-key";
import { openTestApi, type TestApi } from "../support/api";

let api: TestApi;

beforeAll(async () => {
  api = await openTestApi();
});

describe("GET /signing-keys", () => {
  it("tells anybody the key in use before anything was signed, the same at every request", async () => {
    const { status, body } = await api.call("GET", "/signing-keys");
    expect(status).toBe(200);
    expect(body.items).toHaveLength(1);
    expect(body.items[0]).toMatchObject({ algorithm: "Ed25519", until: null });
    expect(body.items[0].pem).toMatch(/^-----BEGIN PUBLIC KEY-----\n/);
    expect(JSON.stringify(body)).not.toContain("PRIVATE");
    expect((await api.call("GET", "/signing-keys")).body).toEqual(body);
  });

  it("names each key by the SHA-256 of its SPKI DER", async () => {
    const [key] = (await api.call("GET", "/signing-keys")).body.items;
    const der = createPublicKey(key.pem).export({ type: "spki", format: "der" });
    expect(key.keyId).toBe(createHash("sha256").update(der).digest("hex").slice(0, 16));
  });

  it("registers one key once when many ask at the same time", async () => {
    await Promise.all(Array.from({ length: 8 }, () => ensureSigningKey(api.db, new Date())));
    expect((await api.call("GET", "/signing-keys")).body.items).toHaveLength(1);
  });

  it("keeps a replaced key with the end of its period, and reopens it when it comes back", async () => {
    const file = signingKeyFile();
    const [first] = (await api.call("GET", "/signing-keys")).body.items;
    const kept = readFileSync(file, "utf8");
    const replace = (pem: string) => {
      rmSync(file);
      writeFileSync(file, pem, { mode: 0o600 });
    };
    replace(generateKeyPairSync("ed25519").privateKey.export({ type: "pkcs8", format: "pem" }) as string);
    const replaced = (await api.call("GET", "/signing-keys")).body.items;
    expect(replaced).toHaveLength(2);
    expect(replaced[0]).toMatchObject({ keyId: first.keyId, until: replaced[1].from });
    expect(replaced[1].until).toBeNull();
    replace(kept);
    const back = (await api.call("GET", "/signing-keys")).body.items;
    expect(back.map((key: { until: string | null }) => key.until === null)).toEqual([true, false]);
  });
});
