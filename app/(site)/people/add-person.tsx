"use client";

import { useRouter } from "next/navigation";
import { useState } from "react";
import type { ProblemDetails } from "@/app/_components/api-client";
import { Button } from "@/app/_components/button";
import { type Confirmation, ConfirmDialog } from "@/app/_components/confirm-dialog";
import { errorAt } from "@/app/_components/form/error-at";
import { TextInput } from "@/app/_components/form/text-input";
import { useToast } from "@/app/_components/toast";
import { addPersonAction } from "./actions";
import { RoleChoice, rolesOf } from "./role-choice";

/** The button that adds a person, and its form. */
export function AddPerson({ oneTimeCode }: { oneTimeCode: boolean }) {
  const router = useRouter();
  const tell = useToast();
  const [open, setOpen] = useState(false);
  const [problem, setProblem] = useState<ProblemDetails | null>(null);

  const add = async ({ password, oneTimeCode: code }: Confirmation, form: FormData) => {
    const [name, email] = [String(form.get("name")), String(form.get("email"))];
    const person = { name, email, roles: rolesOf(form), password, oneTimeCode: code };
    const result = await addPersonAction(person);
    setProblem(result.ok ? null : result.problem);
    if (!result.ok) return result.problem;
    tell({ tone: "good", title: `${name} added`, text: `A link to choose a password goes to ${result.value.email}.` });
    router.refresh();
    return null;
  };

  return (
    <>
      <Button look="primary" onClick={() => setOpen(true)}>
        Add a person
      </Button>
      <ConfirmDialog
        open={open}
        onOpenChange={(next) => {
          setOpen(next);
          setProblem(null);
        }}
        title="Add a person"
        description="They get a mailed link to choose a password; nobody else ever knows it."
        confirm="Add and mail the link"
        password
        oneTimeCode={oneTimeCode}
        onConfirm={add}
      >
        <TextInput
          label="Name"
          name="name"
          required
          maxLength={120}
          autoComplete="off"
          error={errorAt(problem, "/name")}
        />
        <TextInput
          label="E-mail"
          name="email"
          type="email"
          required
          maxLength={254}
          autoComplete="off"
          help="They sign in with it."
          error={errorAt(problem, "/email")}
        />
        <RoleChoice error={errorAt(problem, "/roles")} />
      </ConfirmDialog>
    </>
  );
}
