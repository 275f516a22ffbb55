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
import { Select, type SelectOption } from "@/app/_components/form/select";
import { TextInput } from "@/app/_components/form/text-input";
import { type NewLot, newLot } from "@/schemas/api/lots";
import { createLotAction } from "../actions";

/** A lot's code, family and firmware. */
export function LotForm({ families, family }: { families: readonly SelectOption[]; family?: string }) {
  const router = useRouter();
  const [problem, setProblem] = useState<ProblemDetails | null>(null);
  const { register, handleSubmit, setError, formState } = useForm<z.input<typeof newLot>, unknown, NewLot>({
    resolver: zodResolver(newLot),
    defaultValues: { code: "", family: family ?? families[0]?.value ?? "", firmware: "" },
  });
  const { errors, isSubmitting } = formState;

  const send = async (lot: NewLot) => {
    const result = await createLotAction(lot);
    if (result.ok) return router.push(`/lots/${lot.code}`);
    setProblem(result.problem);
    if (result.problem.code === "lot.exists") setError("code", { message: "There is a lot of this code already." });
  };

  return (
    <form onSubmit={handleSubmit(send)} noValidate className="flex max-w-[720px] flex-col gap-[18px]">
      <Card>
        <div className="flex flex-col gap-4">
          <TextInput
            {...register("code")}
            label="Code"
            code
            autoComplete="off"
            help="As on the traveller: 1 to 32 of A–Z, 0–9, dot, hyphen and underscore."
            error={errors.code?.message}
          />
          <Select
            {...register("family")}
            label="Family"
            options={families}
            help="The newest published revision is pinned; later ones don't reach this lot."
            error={errors.family?.message}
          />
          <TextInput
            {...register("firmware")}
            label="Firmware in the devices"
            code
            placeholder="2.3.0"
            help="Three numbers. Only layouts for this version can be packed."
            error={errors.firmware?.message}
          />
        </div>
      </Card>
      <FormError problem={problem} />
      <div className="flex flex-wrap justify-end gap-2.5">
        <LinkButton href="/lots">Leave it</LinkButton>
        <Button type="submit" look="primary" pending={isSubmitting}>
          Make the lot
        </Button>
      </div>
    </form>
  );
}
