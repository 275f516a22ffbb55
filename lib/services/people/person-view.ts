import type { Db } from "@/db/executor";
import { getPerson, type PersonRow } from "@/db/queries/people";
import { type GrantRow, listOpenGrants } from "@/db/queries/role-grants";
import type { PersonCtx } from "@/lib/services/context";
import type { PersonView } from "@/schemas/api/people";

/** People as replies show them, with what they hold and wait for. How they sign in is for admins and auditors. */
export async function viewsOf(ctx: PersonCtx, db: Db, rows: readonly PersonRow[]): Promise<PersonView[]> {
  const grants = await listOpenGrants(
    db,
    rows.map((row) => row.id),
  );
  const mayLook = ctx.actor.roles.some((role) => role === "admin" || role === "auditor");
  return rows.map((row) => {
    const own = grants.filter((grant) => grant.personId === row.id);
    return { ...viewOf(row, own), signIn: mayLook ? signInOf(row) : null };
  });
}

/** One person. @throws AppError `person.not_found` */
export async function getPersonView(ctx: PersonCtx, db: Db, id: string): Promise<PersonView> {
  const [view] = await viewsOf(ctx, db, [await getPerson(db, id)]);
  return view as PersonView;
}

function viewOf(row: PersonRow, grants: readonly GrantRow[]): Omit<PersonView, "signIn"> {
  const { id, name, email, active } = row;
  const pending = grants.filter((grant) => grant.confirmedAt === null && grant.askedBy !== null);
  return {
    id,
    name,
    email,
    active,
    roles: grants.filter((grant) => grant.confirmedAt !== null).map((grant) => grant.role),
    pending: pending.map((grant) => ({
      role: grant.role,
      askedBy: grant.askedByName ?? "",
      askedById: grant.askedBy as string,
      askedAt: grant.askedAt.toISOString(),
    })),
    createdAt: row.createdAt.toISOString(),
  };
}

function signInOf(row: PersonRow): PersonView["signIn"] {
  return {
    passwordChosen: row.passwordChosen,
    oneTimeCode: row.oneTimeEnrolledAt !== null,
    lastSeenAt: row.lastSeenAt?.toISOString() ?? null,
  };
}
