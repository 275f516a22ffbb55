"use client";

import { useRouter } from "next/navigation";
import { type FormEvent, useState } from "react";
import type { ProblemDetails } from "@/app/_components/api-client";
import { Button } from "@/app/_components/button";
import { type Confirmation, ConfirmDialog } from "@/app/_components/confirm-dialog";
import { errorAt } from "@/app/_components/form/error-at";
import { TextInput } from "@/app/_components/form/text-input";
import { useToast } from "@/app/_components/toast";
import type { Role } from "@/lib/domain/roles";
import type { PersonView } from "@/schemas/api/people";
import { changePersonAction } from "../actions";
import { RoleChoice, rolesOf } from "../role-choice";

export interface PersonFormProps {
  person: PersonView;
  /** Nobody changes their own roles. */
  isSelf: boolean;
  oneTimeCode: boolean;
}

interface Change {
  name?: string;
  email?: string;
  roles?: Role[];
}

/** Name, roles, and the address while it may still be mended. */
export function PersonForm({ person, isSelf, oneTimeCode }: PersonFormProps) {
  const router = useRouter();
  const tell = useToast();
  const [change, setChange] = useState<Change>();
  const [problem, setProblem] = useState<ProblemDetails | null>(null);
  const mayMend = person.signIn?.passwordChosen === false;
  const wanted = [...person.roles, ...person.pending.map((one) => one.role)];

  const ask = (event: FormEvent<HTMLFormElement>) => {
    event.preventDefault();
    const form = new FormData(event.currentTarget);
    const name = String(form.get("name"));
    const email = String(form.get("email") ?? person.email);
    const found = {
      ...(name !== person.name && { name }),
      ...(email !== person.email && { email }),
      ...(!isSelf && !sameRoles(rolesOf(form), wanted) && { roles: rolesOf(form) }),
    };
    if (Object.keys(found).length === 0) tell({ tone: "info", title: "Nothing is changed yet" });
    else setChange(found);
  };
  const save = async ({ password, oneTimeCode: code }: Confirmation) => {
    const result = await changePersonAction(person.id, { ...change, password, oneTimeCode: code });
    setProblem(result.ok ? null : result.problem);
    if (!result.ok) return result.problem;
    tell({ tone: "good", title: `${result.value.name} changed` });
    router.refresh();
    return null;
  };

  return (
    <form onSubmit={ask} className="flex flex-col gap-4">
      <TextInput
        label="Name"
        name="name"
        defaultValue={person.name}
        required
        maxLength={120}
        error={errorAt(problem, "/name")}
      />
      <TextInput
        label="E-mail"
        name="email"
        type="email"
        defaultValue={person.email}
        readOnly={!mayMend}
        required
        help={mayMend ? "Mending it mails a new link there." : "Stays: the person signs in with it."}
        error={errorAt(problem, "/email")}
      />
      {isSelf ? (
        <p className="text-sm text-ink-soft">Nobody changes their own roles; another admin does.</p>
      ) : (
        // Keyed by what is held, so that it shows the roles of the server again after a change.
        <RoleChoice key={wanted.join()} held={wanted} error={errorAt(problem, "/roles")} />
      )}
      <div className="flex justify-end">
        <Button type="submit" look="primary">
          Save
        </Button>
      </div>
      <ConfirmDialog
        open={change !== undefined}
        onOpenChange={(open) => !open && setChange(undefined)}
        title={`Change ${person.name}`}
        description={change?.roles ? describe(wanted, change.roles) : undefined}
        confirm="Save the changes"
        password
        oneTimeCode={oneTimeCode}
        onConfirm={save}
      />
    </form>
  );
}

function sameRoles(a: readonly Role[], b: readonly Role[]): boolean {
  return a.length === b.length && a.every((role) => b.includes(role));
}

function describe(before: readonly Role[], after: readonly Role[]): string {
  const gained = after.filter((role) => !before.includes(role));
  const lost = before.filter((role) => !after.includes(role));
  const parts = [
    gained.length > 0 ? `Gets ${gained.join(", ")}.` : "",
    lost.length > 0 ? `Loses ${lost.join(", ")} at once.` : "",
    gained.some((role) => role === "reviewer" || role === "admin") ? "Reviewer and admin wait for a second admin." : "",
  ];
  return parts.filter(Boolean).join(" ");
}
