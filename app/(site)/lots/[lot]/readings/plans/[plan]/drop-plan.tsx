"use client";

import { useRouter } from "next/navigation";
import { useState } from "react";
import { callApi } from "@/app/_components/api-client";
import { Button } from "@/app/_components/button";
import { ConfirmDialog } from "@/app/_components/confirm-dialog";
import { useToast } from "@/app/_components/toast";

/** Drops a plan that will not be run, with the reason. */
export function DropPlan({ id, name }: { id: string; name: string }) {
  const router = useRouter();
  const tell = useToast();
  const [open, setOpen] = useState(false);
  return (
    <div className="flex justify-end print:hidden">
      <Button look="danger" onClick={() => setOpen(true)}>
        Drop the plan
      </Button>
      <ConfirmDialog
        open={open}
        onOpenChange={setOpen}
        title={`Drop “${name}”`}
        description="It stays to be read, and no readings can be uploaded for it any more. Its devices can be drawn again."
        confirm="Drop the plan"
        danger
        reason="required"
        onConfirm={async ({ reason }) => {
          await callApi(`/api/v1/run-plans/${id}/drop`, { method: "POST", json: { reason } });
          tell({ tone: "good", title: `“${name}” is dropped` });
          router.refresh();
          return null;
        }}
      />
    </div>
  );
}
