import { Checkbox } from "@/app/_components/form/checkbox";
import { needsSecondAdmin } from "@/lib/domain/people-rules";
import { ROLES, type Role } from "@/lib/domain/roles";
import { roleWords } from "./role-words";

/** The roles as check boxes named `roles`, with what each may do. */
export function RoleChoice({ held = [], error }: { held?: readonly Role[]; error?: string }) {
  return (
    <fieldset className="flex min-w-0 flex-col gap-2.5">
      <legend className="mb-1.5 text-sm font-semibold">Roles</legend>
      {ROLES.map((role) => (
        <Checkbox
          key={role}
          name="roles"
          value={role}
          defaultChecked={held.includes(role)}
          label={
            <>
              {role}
              {needsSecondAdmin(role) ? <span className="text-ink-soft"> · takes a second admin</span> : null}
            </>
          }
          help={roleWords[role]}
        />
      ))}
      {error ? <p className="text-sm text-oxide">{error}</p> : null}
    </fieldset>
  );
}

/** The roles that a form of {@link RoleChoice} names. */
export function rolesOf(form: FormData): Role[] {
  return ROLES.filter((role) => form.getAll("roles").includes(role));
}
