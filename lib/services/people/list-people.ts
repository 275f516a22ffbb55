import * as people from "@/db/queries/people";
import { countEligible, listGrants } from "@/db/queries/role-grants";
import { type WatchedRole, warningsOf } from "@/lib/domain/people-rules";
import type { Role } from "@/lib/domain/roles";
import type { PersonCtx } from "@/lib/services/context";
import { type Page, pageOf } from "@/lib/services/page";
import type { PersonView, RoleWarning } from "@/schemas/api/people";
import { FIRST_ADMIN_EMAIL } from "./invite-first-admin";
import { getPersonView, viewsOf } from "./person-view";

export type PeoplePage = Page<PersonView> & { warnings: RoleWarning[] };

/** People in the order they were added, and which roles too few of them can act in. */
export async function listPeople(ctx: PersonCtx, page: { limit: number; cursor?: string }): Promise<PeoplePage> {
  const rows = await people.listPeople(ctx.db, { limit: page.limit + 1, after: page.cursor });
  const cut = pageOf(rows, page.limit, (row) => row.id);
  const named = cut.items.filter((row) => row.email !== FIRST_ADMIN_EMAIL);
  return { items: await viewsOf(ctx, ctx.db, named), next: cut.next, warnings: await listRoleWarnings(ctx) };
}

/** Roles that fewer than two people can act in now, in words. */
export async function listRoleWarnings(ctx: PersonCtx): Promise<RoleWarning[]> {
  const eligible = await countEligible(ctx.db);
  const count = (role: WatchedRole) => eligible.get(role) ?? 0;
  return warningsOf({ engineer: count("engineer"), reviewer: count("reviewer"), admin: count("admin") });
}

/** A person. @throws AppError `person.not_found` */
export function getPerson(ctx: PersonCtx, id: string): Promise<PersonView> {
  return getPersonView(ctx, ctx.db, id);
}

export type GrantView = {
  id: string;
  role: Role;
  askedBy: string | null;
  askedAt: string;
  confirmedBy: string | null;
  confirmedAt: string | null;
  endedBy: string | null;
  endedAt: string | null;
};

/** Every role that a person ever held or was to hold, newest first. */
export async function listRoleHistory(ctx: PersonCtx, personId: string): Promise<GrantView[]> {
  const rows = await listGrants(ctx.db, personId);
  return rows.map(({ id, role, askedByName, askedAt, confirmedByName, confirmedAt, endedByName, endedAt }) => ({
    id,
    role,
    askedBy: askedByName,
    askedAt: askedAt.toISOString(),
    confirmedBy: confirmedByName,
    confirmedAt: confirmedAt?.toISOString() ?? null,
    endedBy: endedByName,
    endedAt: endedAt?.toISOString() ?? null,
  }));
}
