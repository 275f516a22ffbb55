"use client";

import { zodResolver } from "@hookform/resolvers/zod";
import { useRouter } from "next/navigation";
import { useState } from "react";
import { useForm } from "react-hook-form";
import type { z } from "zod";
import type { ProblemDetails } from "@/app/_components/api-client";
import { Button } from "@/app/_components/button";
import { Dialog } from "@/app/_components/dialog";
import { Checkbox } from "@/app/_components/form/checkbox";
import { FieldError } from "@/app/_components/form/field";
import { FormError } from "@/app/_components/form/form-error";
import { TextInput } from "@/app/_components/form/text-input";
import { useToast } from "@/app/_components/toast";
import type { StationView } from "@/lib/services/stations/manage-stations";
import { newStation } from "@/schemas/api/stations";
import { addStationAction, changeStationAction } from "./actions";

type NewStation = z.output<typeof newStation>;

export interface StationDialogProps {
  /** The one to change; left out for a new one. */
  station?: StationView;
  /** Codes of all families. */
  families: readonly string[];
  onClose: () => void;
}

/** A station's name and the families it may write. */
export function StationDialog({ station, families, onClose }: StationDialogProps) {
  const router = useRouter();
  const tell = useToast();
  const [problem, setProblem] = useState<ProblemDetails | null>(null);
  const { register, handleSubmit, setError, formState } = useForm<z.input<typeof newStation>, unknown, NewStation>({
    resolver: zodResolver(newStation),
    defaultValues: station ? { name: station.name, families: station.families } : { name: "", families: [] },
  });
  const { errors, isSubmitting } = formState;

  const send = async (values: NewStation) => {
    const result = station ? await changeStationAction(station.id, values) : await addStationAction(values);
    if (!result.ok) {
      setProblem(result.problem);
      if (result.problem.code === "station.exists")
        setError("name", { message: "There is a station of this name already." });
      return;
    }
    tell({ tone: "good", title: station ? `${values.name} changed` : `${values.name} added` });
    onClose();
    if (station) router.refresh();
    else router.push(`/stations/${result.value.id}`);
  };

  return (
    <Dialog
      open
      onOpenChange={(open) => !open && onClose()}
      title={station ? `Change ${station.name}` : "Add a station"}
      description={station ? "Its keys and its records stay." : "Then make a key for it; it is shown once."}
    >
      <form onSubmit={handleSubmit(send)} noValidate className="flex flex-col gap-3">
        <TextInput
          {...register("name")}
          label="Name"
          help="As people call it, such as Bench 3."
          maxLength={80}
          error={errors.name?.message}
        />
        <fieldset>
          <legend className="mb-1 text-sm font-semibold">Families it may write</legend>
          {families.length === 0 ? (
            <p className="text-sm text-ink-soft">There are no families yet: an engineer adds one first.</p>
          ) : null}
          <div className="flex flex-col gap-1.5">
            {families.map((code) => (
              <Checkbox
                key={code}
                {...register("families")}
                value={code}
                label={<span className="font-mono">{code}</span>}
              />
            ))}
          </div>
          {errors.families ? <FieldError>{errors.families.message ?? "Name at least one family."}</FieldError> : null}
        </fieldset>
        <FormError problem={problem} />
        <div className="flex flex-wrap justify-end gap-2.5">
          <Button onClick={onClose}>Leave it</Button>
          <Button type="submit" look="primary" pending={isSubmitting}>
            {station ? "Save the station" : "Add the station"}
          </Button>
        </div>
      </form>
    </Dialog>
  );
}
