"use client";

import { zodResolver } from "@hookform/resolvers/zod";
import { useRouter } from "next/navigation";
import { useState } from "react";
import { useForm } from "react-hook-form";
import type { z } from "zod";
import type { ProblemDetails } from "@/app/_components/api-client";
import { Button, LinkButton } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { FormError } from "@/app/_components/form/form-error";
import { NumberInput } from "@/app/_components/form/number-input";
import { Select } from "@/app/_components/form/select";
import { TextInput } from "@/app/_components/form/text-input";
import { type FamilyDocument, familyDocument } from "@/schemas/api/families";
import { createFamilyAction, reviseFamilyAction } from "./actions";
import { accuracyClasses, familyFieldGroups, thresholdFields } from "./family-fields";

type Values = z.input<typeof familyDocument>;

export interface FamilyFormProps {
  /** Values to begin with. */
  initial?: Partial<FamilyDocument>;
  /** Code of the family that gets another revision; its code is then given. */
  revise?: string;
}

/** Numbers as typed: a decimal comma counts as a point, nothing typed is no number. */
const toNumber = (typed: unknown) => {
  if (typeof typed === "number") return typed;
  const text = String(typed ?? "")
    .trim()
    .replace("−", "-")
    .replace(",", ".");
  return text === "" ? undefined : Number(text);
};

/** Values of a family, for a new one or the next revision. */
export function FamilyForm({ initial = {}, revise }: FamilyFormProps) {
  const router = useRouter();
  const [problem, setProblem] = useState<ProblemDetails | null>(null);
  const { register, handleSubmit, setError, formState } = useForm<Values, unknown, FamilyDocument>({
    resolver: zodResolver(familyDocument),
    defaultValues: initial,
  });
  const { errors, isSubmitting } = formState;

  const send = async (typed: FamilyDocument) => {
    const document = withoutEmptyChecks(typed);
    const result =
      revise === undefined ? await createFamilyAction(document) : await reviseFamilyAction(revise, document);
    if (result.ok) return router.push(`/families/${document.code}`);
    setProblem(result.problem);
    if (result.problem.code === "family.exists")
      setError("code", { message: "There is a family of this code already." });
  };

  return (
    <form onSubmit={handleSubmit(send)} className="flex flex-col gap-[18px]" noValidate>
      <Card title="Name">
        <div className="grid gap-4 sm:grid-cols-2 lg:grid-cols-3">
          <TextInput
            {...register("code")}
            label="Code"
            code
            readOnly={revise !== undefined}
            help="1 to 32 of A–Z, 0–9, dot, hyphen and underscore; stays for ever."
            error={errors.code?.message}
          />
          <TextInput {...register("name")} label="Name" help="As people call it." error={errors.name?.message} />
          <Select
            {...register("accuracyClass")}
            label="Accuracy class"
            help="Of OIML R 60; decides the error envelope."
            options={accuracyClasses.map((value) => ({ value, name: `Class ${value}` }))}
            error={errors.accuracyClass?.message}
          />
        </div>
      </Card>
      {familyFieldGroups.map((group) => (
        <Card key={group.title} title={group.title}>
          <div className="grid gap-4 sm:grid-cols-2 lg:grid-cols-3">
            {group.fields.map((field) => (
              <NumberInput
                key={field.name}
                {...register(field.name, { setValueAs: toNumber })}
                label={field.label}
                unit={field.unit}
                help={field.help}
                error={numberError(errors[field.name])}
              />
            ))}
          </div>
        </Card>
      ))}
      <Card title="Checks of packages" note="From when on they warn; what is left empty follows the default">
        <div className="grid gap-4 sm:grid-cols-2 lg:grid-cols-3">
          {thresholdFields.map(({ name, label, unit, help }) => (
            <NumberInput
              key={name}
              {...register(`checks.${name}`, { setValueAs: toNumber })}
              label={label}
              unit={unit}
              help={help}
              error={numberError(errors.checks?.[name])}
            />
          ))}
        </div>
      </Card>
      <FormError problem={problem} />
      <div className="flex flex-wrap justify-end gap-2.5">
        <LinkButton href={revise === undefined ? "/families" : `/families/${revise}`}>Leave it</LinkButton>
        <Button type="submit" look="primary" pending={isSubmitting} pendingText="Saving">
          {revise === undefined ? "Add family as a draft" : "Save as a new revision"}
        </Button>
      </div>
    </form>
  );
}

/** Thresholds that nobody typed stay out of the document, so that its digest says only what was decided. */
function withoutEmptyChecks({ checks, ...document }: FamilyDocument): FamilyDocument {
  const typed = Object.entries(checks ?? {}).filter(([, value]) => value !== undefined);
  return typed.length === 0 ? document : { ...document, checks: Object.fromEntries(typed) };
}

function numberError(error: { type?: string; message?: string } | undefined): string | undefined {
  return error?.type === "invalid_type" ? "Takes a number." : error?.message;
}
