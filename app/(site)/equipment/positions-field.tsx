"use client";

import { X } from "lucide-react";
import { type Control, type FieldErrors, type UseFormRegister, useFieldArray } from "react-hook-form";
import type { z } from "zod";
import { Button } from "@/app/_components/button";
import { FieldError, inputLook } from "@/app/_components/form/field";
import type { NewEquipment, newEquipment } from "@/schemas/api/equipment";

type Given = z.input<typeof newEquipment>;

export interface PositionsFieldProps {
  control: Control<Given, unknown, NewEquipment>;
  register: UseFormRegister<Given>;
  errors: FieldErrors<Given>["positions"];
  toNumber: (typed: unknown) => number | undefined;
}

/** Places of a chamber, each with how far it is off the reference sensor. */
export function PositionsField({ control, register, errors, toNumber }: PositionsFieldProps) {
  const { fields, append, remove } = useFieldArray({ control, name: "positions" });
  const number = { setValueAs: toNumber };
  return (
    <fieldset className="m-0 min-w-0">
      <legend className="mb-1 text-sm font-semibold">Places in the chamber</legend>
      <p className="mb-2 text-xs text-ink-soft">
        From the certificate of uniformity: how much warmer a place is than the reference sensor, and the expanded
        uncertainty of that, both in K. Names as in the readings' column position.
      </p>
      {fields.length > 0 ? (
        <div className="mb-1 grid grid-cols-[1fr_1fr_1fr_auto] gap-x-2 gap-y-1.5">
          <span className="text-xs text-ink-soft">Place</span>
          <span className="text-xs text-ink-soft">Deviation, K</span>
          <span className="text-xs text-ink-soft">Uncertainty, K</span>
          <span />
          {fields.map((field, index) => (
            <div key={field.id} className="contents">
              <input
                {...register(`positions.${index}.position`)}
                aria-label={`Place ${index + 1}`}
                aria-invalid={errors?.[index]?.position ? true : undefined}
                className={`${inputLook} h-9 font-mono`}
              />
              <input
                {...register(`positions.${index}.deviationK`, number)}
                aria-label={`Deviation of place ${index + 1} in K`}
                aria-invalid={errors?.[index]?.deviationK ? true : undefined}
                inputMode="decimal"
                className={`${inputLook} h-9 text-right font-mono`}
              />
              <input
                {...register(`positions.${index}.uncertaintyK`, number)}
                aria-label={`Uncertainty of place ${index + 1} in K`}
                aria-invalid={errors?.[index]?.uncertaintyK ? true : undefined}
                inputMode="decimal"
                className={`${inputLook} h-9 text-right font-mono`}
              />
              <Button onClick={() => remove(index)} aria-label={`Remove place ${index + 1}`} title="Remove this place">
                <X size={16} aria-hidden />
              </Button>
              <RowError error={errors?.[index]} />
            </div>
          ))}
        </div>
      ) : null}
      <Button onClick={() => append({ position: "", deviationK: 0, uncertaintyK: 0 })}>Add a place</Button>
    </fieldset>
  );
}

type RowErrorOf = NonNullable<NonNullable<PositionsFieldProps["errors"]>[number]>;

function RowError({ error }: { error: RowErrorOf | undefined }) {
  const message = error?.position?.message ?? error?.deviationK?.message ?? error?.uncertaintyK?.message;
  return message ? (
    <div className="col-span-4">
      <FieldError>{message}</FieldError>
    </div>
  ) : null;
}
