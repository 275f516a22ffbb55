import type { Role } from "./roles";

/** Roles that one admin asks for and another confirms: they decide over others' work. */
export const TWO_ADMIN_ROLES: readonly Role[] = ["reviewer", "admin"];

export function needsSecondAdmin(role: Role): boolean {
  return TWO_ADMIN_ROLES.includes(role);
}

/** Roles of which a firm needs two people, so that nobody is left with work that only they may decide on. */
export const WATCHED_ROLES = ["engineer", "reviewer", "admin"] as const;
export type WatchedRole = (typeof WATCHED_ROLES)[number];
export const ELIGIBLE_MIN = 2;

const LACKING: Record<WatchedRole, string> = {
  engineer: "If one engineer is away, nobody can build a package or stop a bad one in their place.",
  reviewer: "A reviewer can't approve what they made themselves, so work of theirs would wait for ever.",
  admin: "The roles reviewer and admin take two admins, so with one away nobody new can get them.",
};

/** One sentence a role of which fewer than two people can sign in now. */
export function warningsOf(
  eligible: Record<WatchedRole, number>,
): { role: WatchedRole; count: number; message: string }[] {
  return WATCHED_ROLES.filter((role) => eligible[role] < ELIGIBLE_MIN).map((role) => ({
    role,
    count: eligible[role],
    message: `${eligible[role] === 0 ? "Nobody" : "Only one person"} can act as ${role} now. ${LACKING[role]}`,
  }));
}

/** Roles to ask for and roles to end so that somebody holds, or waits for, exactly the wanted ones. */
export function stepsToRoles(open: readonly Role[], wanted: readonly Role[]): { ask: Role[]; end: Role[] } {
  return {
    ask: wanted.filter((role, i) => !open.includes(role) && wanted.indexOf(role) === i),
    end: open.filter((role) => !wanted.includes(role)),
  };
}
