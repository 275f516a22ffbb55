import { z } from "zod";
import { timestamp } from "./common";

export const signingKeyList = z.object({
  items: z.array(
    z.object({
      keyId: z
        .string()
        .regex(/^[0-9a-f]{16}$/)
        .meta({ description: "First 16 hex digits of the SHA-256 of the key's SPKI DER" }),
      algorithm: z.literal("Ed25519"),
      pem: z.string().meta({ description: "Public key, SPKI PEM" }),
      from: timestamp,
      until: timestamp.nullable().meta({ description: "Null for the key in use" }),
    }),
  ),
  next: z.null(),
});
