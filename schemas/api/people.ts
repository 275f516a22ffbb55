import { z } from "zod";
import { ROLES } from "@/lib/domain/roles";
import { id, pageOf, reason, signed, timestamp } from "@/schemas/api/common";

export const role = z.enum(ROLES);
const roles = z
  .array(role)
  .max(ROLES.length)
  .meta({ description: "Roles to hold, each once; reviewer and admin wait for a second admin" });

export const personName = z.string().trim().min(1, "Give a name.").max(120);
export const email = z
  .string()
  .trim()
  .toLowerCase()
  .max(254, "Takes at most 254 characters.")
  .pipe(z.email("Takes an e-mail address such as r.hale@marram.example."))
  .meta({ description: "E-mail address, lower-cased at entry" });
/** A password to be chosen; its length and the rest are judged by the service, which knows the person. */
export const newPassword = z.string().min(1, "Choose a password.").max(1000, "Takes at most 1,000 characters.");

export const newPerson = z.strictObject({ name: personName, email, roles, ...signed });

export const personChange = z
  .strictObject({
    name: personName.optional(),
    email: email.optional().meta({ description: "Only until the person has chosen a password" }),
    active: z.boolean().optional(),
    roles: roles.optional(),
    ...signed,
  })
  .refine(
    ({ name, email, active, roles }) => [name, email, active, roles].some((value) => value !== undefined),
    "Name at least one value to change.",
  );

export const confirmation = z.strictObject(signed);
export const refusal = z.strictObject({ reason: reason.optional(), ...signed });

export const pendingRole = z.object({
  role,
  askedBy: z.string().meta({ description: "Name of the admin who asked" }),
  askedById: id,
  askedAt: timestamp,
});

export const person = z.object({
  id,
  name: z.string(),
  email: z.string(),
  active: z.boolean(),
  roles: z.array(role),
  pending: z.array(pendingRole).meta({ description: "Roles that wait for a second admin" }),
  createdAt: timestamp,
  signIn: z
    .object({ passwordChosen: z.boolean(), oneTimeCode: z.boolean(), lastSeenAt: timestamp.nullable() })
    .nullable()
    .meta({ description: "For admins and auditors; null for everybody else" }),
});

export const roleWarning = z.object({ role, count: z.number().int(), message: z.string() });

export const personList = pageOf(person).extend({
  warnings: z.array(roleWarning).meta({ description: "Roles that fewer than two people can act in now" }),
});

export const byPersonRole = z.object({ id, role });

/** Asking for a link to choose a password, and using one. */
export const linkRequest = z.strictObject({ email });
export const linkUse = z.strictObject({
  token: z.string().min(20).max(200),
  newPassword,
  name: personName.optional().meta({ description: "The first admin's only" }),
  email: email.optional().meta({ description: "The first admin's only" }),
});
export const linkUsed = z.object({ email: z.string() });

export type NewPerson = z.output<typeof newPerson>;
export type PersonChange = z.output<typeof personChange>;
export type PersonView = z.output<typeof person>;
export type RoleWarning = z.output<typeof roleWarning>;
