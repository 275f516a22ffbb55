"use client";

import { useState } from "react";
import { Button } from "@/app/_components/button";
import type { EquipmentView } from "@/lib/services/equipment/keep-equipment";
import { EquipmentDialog } from "../equipment-dialog";

/** Opens the form of the next certificate. */
export function NewCertificate({ equipment }: { equipment: EquipmentView }) {
  const [open, setOpen] = useState(false);
  return (
    <>
      <Button look="primary" onClick={() => setOpen(true)}>
        New certificate
      </Button>
      {open ? <EquipmentDialog equipment={equipment} onClose={() => setOpen(false)} /> : null}
    </>
  );
}
