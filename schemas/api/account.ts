import { z } from "zod";
import { id, pageOf, password, signed, timestamp } from "@/schemas/api/common";
import { newPassword, role } from "@/schemas/api/people";

export const KEY_DAYS_MAX = 365;

export const account = z.object({
  id,
  name: z.string(),
  email: z.string(),
  roles: z.array(role),
  oneTimeCode: z.boolean().meta({ description: "Whether decisions ask for a one-time code" }),
});

export const accessKey = z.object({
  id,
  name: z.string(),
  prefix: z.string().meta({ description: "First characters of the key, by which one tells it from others" }),
  createdAt: timestamp,
  expiresAt: timestamp,
  lastUsedAt: timestamp.nullable(),
  revokedAt: timestamp.nullable(),
});

export const accessKeyList = pageOf(accessKey);

export const newAccessKey = z.strictObject({
  name: z.string().trim().min(1, "Name what the key is for.").max(80),
  expiresInDays: z.number().int().min(1, "Takes 1 to 365 days.").max(KEY_DAYS_MAX, "Takes 1 to 365 days.").default(90),
  ...signed,
});

export const madeAccessKey = accessKey.extend({
  key: z.string().meta({ description: "The key itself, this once" }),
});

export const passwordChange = z.strictObject({ ...signed, newPassword });

export const session = z.object({
  id,
  createdAt: timestamp,
  lastSeenAt: timestamp,
  expiresAt: timestamp,
  userAgent: z.string(),
  address: z.string(),
  current: z.boolean().meta({ description: "The one that asks" }),
});

export const sessionList = pageOf(session);

export const oneTimeStart = z.strictObject({ password });
export const oneTimeSecret = z.object({
  secret: z.string().meta({ description: "Base32, to type into an authenticator app" }),
  uri: z.string().meta({ description: "otpauth address of the same" }),
  qrSvg: z.string().meta({ description: "The address as a QR code" }),
});
export const oneTimeConfirm = z.strictObject({ code: z.string().regex(/^\d{6}$/, "Six digits.") });

export type AccessKeyView = z.output<typeof accessKey>;
export type MadeAccessKey = z.output<typeof madeAccessKey>;
export type SessionView = z.output<typeof session>;
export type OneTimeSecret = z.output<typeof oneTimeSecret>;
