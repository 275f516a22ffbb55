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
import type { EquipmentView } from "@/lib/services/equipment/keep-equipment";
import { type NewEquipment, newEquipment } from "@/schemas/api/equipment";
import { addEquipmentAction, changeEquipmentAction } from "./actions";

const kinds = [
  { value: "sensor", name: "Reference sensor" },
  { value: "chamber", name: "Climate chamber" },
  { value: "load", name: "Load" },
  { value: "reader", name: "Reader of the signal" },
];

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
  const { register, handleSubmit, setError, formState } = useForm<z.input<typeof newEquipment>, unknown, NewEquipment>({
    resolver: zodResolver(newEquipment),
    defaultValues: equipment ? valuesOf(equipment) : { kind: "sensor" },
  });
  const { errors, isSubmitting } = formState;

  const send = async ({ code, kind, ...certificate }: NewEquipment) => {
    const result = equipment
      ? await changeEquipmentAction(code, certificate)
      : await addEquipmentAction({ code, kind, ...certificate });
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
        <NumberInput
          {...register("uncertainty", { setValueAs: toNumber })}
          label="Uncertainty"
          help="Expanded, as the certificate gives it: °C for sensor and chamber, kg for load, mV/V for reader."
          error={errors.uncertainty?.type === "invalid_type" ? "Takes a number." : errors.uncertainty?.message}
        />
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
