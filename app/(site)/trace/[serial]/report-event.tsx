"use client";

import { useRouter } from "next/navigation";
import { useState } from "react";
import { Button } from "@/app/_components/button";
import { type Confirmation, ConfirmDialog } from "@/app/_components/confirm-dialog";
import { Select } from "@/app/_components/form/select";
import { TextInput } from "@/app/_components/form/text-input";
import { Notice } from "@/app/_components/notice";
import { useToast } from "@/app/_components/toast";
import type { deviceEventKinds } from "@/schemas/api/devices";
import { recordEventAction } from "./actions";

type Kind = (typeof deviceEventKinds)[number];

const KINDS: Record<Kind, { name: string; does: string; confirm: string; done: string; danger?: boolean }> = {
  hold: {
    name: "Hold it",
    does: "At once no station may write it, and it is packed no more. Going on takes a second person.",
    confirm: "Hold the device",
    done: "is held",
    danger: true,
  },
  resume: {
    name: "Let it go on",
    does: "The hold ends. Whoever held it can't end it: a second person has to.",
    confirm: "Let it go on",
    done: "goes on",
  },
  scrap: {
    name: "Scrapped",
    does: "Nothing more can happen to it. This can't be undone.",
    confirm: "Record as scrapped",
    done: "is scrapped",
    danger: true,
  },
  rework: {
    name: "Reworked",
    does: "Its record tells that it was worked on.",
    confirm: "Record the rework",
    done: "was reworked",
  },
  "board-replaced": {
    name: "Board replaced",
    does: "What was written before no longer counts: it has to be written again.",
    confirm: "Record the new board",
    done: "has another board",
  },
  firmware: {
    name: "Firmware changed",
    does: "Its record tells the new version.",
    confirm: "Record the firmware",
    done: "has other firmware",
  },
  shipped: { name: "Shipped", does: "It has left the house.", confirm: "Record as shipped", done: "was shipped" },
  returned: {
    name: "Came back",
    does: "It is in the house again. Check a dump before anything is written.",
    confirm: "Record the return",
    done: "came back",
  },
};

export interface ReportEventProps {
  serial: string;
  held: boolean;
  shipped: boolean;
  oneTimeCode: boolean;
}

/** Button and dialog that record what happened to a device. */
export function ReportEvent({ serial, held, shipped, oneTimeCode }: ReportEventProps) {
  const router = useRouter();
  const tell = useToast();
  const [open, setOpen] = useState(false);
  const [kind, setKind] = useState<Kind>(held ? "resume" : "hold");
  const offered = (Object.keys(KINDS) as Kind[]).filter(
    (one) =>
      !(one === "hold" && held) &&
      !(one === "resume" && !held) &&
      !(one === "shipped" && (shipped || held)) &&
      !(one === "returned" && !shipped),
  );
  const signed = kind === "hold" || kind === "resume";
  const { does, confirm, done, danger } = KINDS[kind];

  const change = (next: boolean) => {
    setOpen(next);
    if (next) setKind(held ? "resume" : "hold");
  };
  const send = async (values: Confirmation, form: FormData) => {
    const text = (name: string) => String(form.get(name) ?? "").trim() || undefined;
    const facts = { reference: text("reference"), hardwareId: text("hardwareId"), firmware: text("firmware") };
    const result = await recordEventAction(serial, { kind, ...values, ...facts });
    if (!result.ok) return result.problem;
    tell({ tone: "good", title: `${serial} ${done}` });
    router.refresh();
    return null;
  };

  return (
    <>
      <Button onClick={() => change(true)}>Report an event</Button>
      <ConfirmDialog
        open={open}
        onOpenChange={change}
        title={`What happened to ${serial}`}
        confirm={confirm}
        danger={danger}
        reason="required"
        password={signed}
        oneTimeCode={oneTimeCode}
        onConfirm={send}
      >
        <Select
          label="Event"
          value={kind}
          onChange={(event) => setKind(event.currentTarget.value as Kind)}
          options={offered.map((one) => ({ value: one, name: KINDS[one].name }))}
          help={does}
        />
        {kind === "resume" ? (
          <Notice tone="caution" title="Two people">
            Who put the hold can't end it. Look at why it was held before you sign.
          </Notice>
        ) : null}
        {kind === "board-replaced" ? (
          <TextInput
            label="Hardware id of the new board"
            name="hardwareId"
            code
            required
            maxLength={64}
            help="As read from the board."
          />
        ) : null}
        {kind === "firmware" ? (
          <TextInput
            label="Firmware now"
            name="firmware"
            code
            required
            maxLength={64}
            help="Its version, such as 2.3.0."
          />
        ) : null}
        <TextInput
          label="Reference, if there is one"
          name="reference"
          maxLength={120}
          help="An order, a complaint, a repair slip."
        />
      </ConfirmDialog>
    </>
  );
}
