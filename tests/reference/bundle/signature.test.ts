import { createPrivateKey, createPublicKey } from "node:crypto";
import { readFileSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { describe, expect, it } from "vitest";
import { isReleaseSignature, keyIdOf, publicKeyPem, signRelease } from "@/builders/bundle/release";
import { sha256Hex } from "@/builders/bundle/sha256";
import { toHex } from "@/builders/codec/files/hex-text";
import { inFolder, runTool } from "@/tests/support/programs";

const vectors = JSON.parse(
  readFileSync(join(import.meta.dirname, "../../fixtures/published/vectors.json"), "utf8"),
) as {
  ed25519_rfc8032_7_1: { sk: string; pk: string; msg: string; sig: string }[];
};
/** DER heads of an Ed25519 key in PKCS #8 and SPKI (RFC 8410); the 32 bytes of the key follow. */
const PKCS8 = "302e020100300506032b657004220420";
const SPKI = "302a300506032b6570032100";

const bytesOf = (hex: string) => new Uint8Array(Buffer.from(hex, "hex"));
const privateOf = (sk: string) =>
  createPrivateKey({ key: Buffer.from(PKCS8 + sk, "hex"), format: "der", type: "pkcs8" });
const publicOf = (pk: string) => createPublicKey({ key: Buffer.from(SPKI + pk, "hex"), format: "der", type: "spki" });

describe("release signatures", () => {
  // Source: RFC 8032, section 7.1, tests 1 to 3.
  it.each(vectors.ed25519_rfc8032_7_1)("sign message “$msg” as published", ({ sk, pk, msg, sig }) => {
    expect(toHex(signRelease(bytesOf(msg), privateOf(sk)))).toBe(sig);
    expect(isReleaseSignature(bytesOf(msg), bytesOf(sig), publicOf(pk))).toBe(true);
    expect(isReleaseSignature(bytesOf(`${msg}00`), bytesOf(sig), publicOf(pk))).toBe(false);
    expect(isReleaseSignature(bytesOf(msg), bytesOf(sig).slice(0, 63), publicOf(pk))).toBe(false);
  });

  it("have the key id of the SPKI DER, from either half of the key", () => {
    const [{ sk, pk } = { sk: "", pk: "" }] = vectors.ed25519_rfc8032_7_1;
    const id = sha256Hex(bytesOf(SPKI + pk)).slice(0, 16);
    expect(keyIdOf(publicOf(pk))).toBe(id);
    expect(keyIdOf(privateOf(sk))).toBe(id);
    expect(keyIdOf(publicKeyPem(privateOf(sk)))).toBe(id);
  });

  it("can be made with a key that openssl generated, and openssl's hold here", async () => {
    await inFolder((folder) => {
      runTool("openssl", ["genpkey", "-algorithm", "ed25519", "-out", "key.pem"], undefined, folder);
      const pem = readFileSync(join(folder, "key.pem"), "utf8");
      writeFileSync(join(folder, "m"), "release");
      runTool(
        "openssl",
        ["pkeyutl", "-sign", "-inkey", "key.pem", "-rawin", "-in", "m", "-out", "s"],
        undefined,
        folder,
      );
      const theirs = new Uint8Array(readFileSync(join(folder, "s")));
      expect(signRelease(new TextEncoder().encode("release"), pem)).toEqual(theirs);
      expect(isReleaseSignature(new TextEncoder().encode("release"), theirs, publicKeyPem(pem))).toBe(true);
    });
  });

  it("refuse keys of another kind and texts that are no key", async () => {
    await inFolder((folder) => {
      runTool(
        "openssl",
        ["genpkey", "-algorithm", "EC", "-pkeyopt", "ec_paramgen_curve:P-256", "-out", "k.pem"],
        undefined,
        folder,
      );
      const pem = readFileSync(join(folder, "k.pem"), "utf8");
      expect(() => keyIdOf(pem)).toThrow(expect.objectContaining({ code: "release.key_not_ed25519" }));
      expect(() => signRelease(new Uint8Array(1), pem)).toThrow(
        expect.objectContaining({ code: "release.key_not_ed25519" }),
      );
      expect(() => keyIdOf("no key")).toThrow(expect.objectContaining({ code: "release.key_malformed" }));
    });
  });
});
