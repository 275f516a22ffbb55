"use client";

import { zodResolver } from "@hookform/resolvers/zod";
import { useRouter } from "next/navigation";
import { useState } from "react";
import { useForm } from "react-hook-form";
import type { z } from "zod";
import type { ProblemDetails } from "@/app/_components/api-client";
import { Button } from "@/app/_components/button";
import { Dialog } from "@/app/_components/dialog";
import { FormError } from "@/app/_components/form/form-error";
import { NumberInput } from "@/app/_components/form/number-input";
import { Select } from "@/app/_components/form/select";
import { TextInput } from "@/app/_components/form/text-input";
import { useToast } from "@/app/_components/toast";
import { EQUIPMENT_NAMES, UNCERTAINTY_UNITS } from "@/lib/domain/format/certificate";
import type { EquipmentView } from "@/lib/services/equipment/keep-equipment";
import { type NewEquipment, newEquipment } from "@/schemas/api/equipment";
import { addEquipmentAction, changeEquipmentAction } from "./actions";
import { PositionsField } from "./positions-field";

const kinds = Object.entries(EQUIPMENT_NAMES).map(([value, name]) => ({ value, name }));

export interface EquipmentDialogProps {
  /** The one that gets a new certificate; left out for a new piece. */
  equipment?: EquipmentView;
  onClose: () => void;
}

/** A piece of equipment, or its next certificate. */
export function EquipmentDialog({ equipment, onClose }: EquipmentDialogProps) {
  const router = useRouter();
  const tell = useToast();
  const [problem, setProblem] = useState<ProblemDetails | null>(null);
  const { register, control, watch, handleSubmit, setError, formState } = useForm<
    z.input<typeof newEquipment>,
    unknown,
    NewEquipment
  >({
    resolver: zodResolver(newEquipment),
    defaultValues: equipment ? valuesOf(equipment) : { kind: "sensor", coverageFactor: 2, positions: [] },
  });
  const { errors, isSubmitting } = formState;
  const kind = watch("kind");

  const send = async (given: NewEquipment) => {
    const { code, kind: ofKind, ...certificate } = given;
    // Places entered before another kind was chosen belong to no one.
    const positions = ofKind === "chamber" ? given.positions : [];
    const result = equipment
      ? await changeEquipmentAction(code, { ...certificate, positions })
      : await addEquipmentAction({ ...given, positions });
    if (!result.ok) {
      setProblem(result.problem);
      if (result.problem.code === "equipment.exists")
        setError("code", { message: "There is equipment of this code already." });
      return;
    }
    tell({ tone: "good", title: equipment ? `${code} has a new certificate` : `${code} added` });
    onClose();
    router.refresh();
  };

  return (
    <Dialog
      open
      onOpenChange={(open) => !open && onClose()}
      title={equipment ? `New certificate of ${equipment.code}` : "Add equipment"}
      description={equipment ? "Runs uploaded before keep the certificate of their day." : undefined}
    >
      <form onSubmit={handleSubmit(send)} noValidate className="flex flex-col gap-3">
        <TextInput
          {...register("code")}
          label="Code"
          code
          readOnly={equipment !== undefined}
          error={errors.code?.message}
        />
        {equipment ? (
          <input type="hidden" {...register("kind")} />
        ) : (
          <Select {...register("kind")} label="Kind" options={kinds} error={errors.kind?.message} />
        )}
        <TextInput
          {...register("certificate")}
          label="Certificate"
          help="Its number, as on paper."
          error={errors.certificate?.message}
        />
        <TextInput
          {...register("calibratedUntil")}
          label="Calibrated until"
          type="date"
          error={errors.calibratedUntil?.message}
        />
        <div className="grid gap-3 sm:grid-cols-2">
          <NumberInput
            {...register("uncertainty", { setValueAs: toNumber })}
            label="Uncertainty"
            unit={UNCERTAINTY_UNITS[kind]}
            help="Expanded, as the certificate gives it."
            error={errors.uncertainty?.type === "invalid_type" ? "Takes a number." : errors.uncertainty?.message}
          />
          <NumberInput
            {...register("coverageFactor", { setValueAs: toNumber })}
            label="Coverage factor k"
            help="2 unless the certificate says otherwise."
            error={errors.coverageFactor?.message}
          />
        </div>
        {kind === "chamber" ? (
          <PositionsField control={control} register={register} errors={errors.positions} toNumber={toNumber} />
        ) : null}
        <FormError problem={problem} />
        <div className="flex flex-wrap justify-end gap-2.5">
          <Button onClick={onClose}>Leave it</Button>
          <Button type="submit" look="primary" pending={isSubmitting}>
            {equipment ? "Save certificate" : "Add equipment"}
          </Button>
        </div>
      </form>
    </Dialog>
  );
}

function valuesOf({ id: _, createdAt: _created, updatedAt: _updated, ...values }: EquipmentView): NewEquipment {
  return values;
}

function toNumber(typed: unknown): number | undefined {
  if (typeof typed === "number") return typed;
  const text = String(typed ?? "")
    .trim()
    .replace(",", ".");
  return text === "" ? undefined : Number(text);
}
