"use client";

import { useRouter } from "next/navigation";
import { useState } from "react";
import { Button } from "@/app/_components/button";
import { ConfirmDialog } from "@/app/_components/confirm-dialog";
import { useToast } from "@/app/_components/toast";
import type { StationView } from "@/lib/services/stations/manage-stations";
import { changeStationAction } from "../actions";
import { StationDialog } from "../station-dialog";

/** Renames a station, changes its families, stops it or lets it go on. */
export function StationActions({ station, families }: { station: StationView; families: readonly string[] }) {
  const router = useRouter();
  const tell = useToast();
  const [open, setOpen] = useState<"change" | "stop">();
  const { id, name, active } = station;

  const turn = async () => {
    const result = await changeStationAction(id, { active: !active });
    if (!result.ok) return result.problem;
    tell({ tone: "good", title: active ? `${name} is stopped` : `${name} goes on` });
    router.refresh();
    return null;
  };
  return (
    <>
      <Button onClick={() => setOpen("change")}>Change it</Button>
      <Button look={active ? "danger" : "outline"} onClick={() => setOpen("stop")}>
        {active ? "Stop the station" : "Let it go on"}
      </Button>
      {open === "change" ? (
        <StationDialog station={station} families={families} onClose={() => setOpen(undefined)} />
      ) : null}
      <ConfirmDialog
        open={open === "stop"}
        onOpenChange={(next) => setOpen(next ? "stop" : undefined)}
        title={active ? `Stop ${name}` : `Let ${name} go on`}
        description={
          active
            ? "From now on all its keys are refused: it gets nothing and can report nothing. Records it still holds come in when it goes on."
            : "Its keys are good again. Make sure that it fetches what is live before it writes."
        }
        confirm={active ? "Stop the station" : "Let it go on"}
        danger={active}
        onConfirm={turn}
      />
    </>
  );
}
