"use client";

import { useRouter } from "next/navigation";
import { useState } from "react";
import type { ProblemDetails } from "@/app/_components/api-client";
import { Button } from "@/app/_components/button";
import { type Confirmation, ConfirmDialog } from "@/app/_components/confirm-dialog";
import { CopyButton } from "@/app/_components/copy-button";
import { Dialog } from "@/app/_components/dialog";
import { errorAt } from "@/app/_components/form/error-at";
import { Select } from "@/app/_components/form/select";
import { TextInput } from "@/app/_components/form/text-input";
import { formatDate } from "@/lib/domain/format/time";
import type { MadeAccessKey } from "@/schemas/api/account";
import { makeKeyAction } from "./actions";

const lifetimes = [
  { value: "7", name: "7 days" },
  { value: "30", name: "30 days" },
  { value: "90", name: "90 days" },
  { value: "365", name: "365 days" },
];

/** The button that makes a key, its form, and the key itself, this once. */
export function MakeKey({ oneTimeCode }: { oneTimeCode: boolean }) {
  const router = useRouter();
  const [open, setOpen] = useState(false);
  const [problem, setProblem] = useState<ProblemDetails | null>(null);
  const [made, setMade] = useState<MadeAccessKey>();

  const make = async ({ password, oneTimeCode: code }: Confirmation, form: FormData) => {
    const expiresInDays = Number(form.get("expiresInDays"));
    const result = await makeKeyAction({ name: String(form.get("name")), expiresInDays, password, oneTimeCode: code });
    setProblem(result.ok ? null : result.problem);
    if (!result.ok) return result.problem;
    setMade(result.value);
    return null;
  };
  const close = () => {
    setMade(undefined);
    router.refresh();
  };

  return (
    <>
      <Button look="outline" onClick={() => setOpen(true)}>
        Make a key
      </Button>
      <ConfirmDialog
        open={open}
        onOpenChange={(next) => {
          setOpen(next);
          setProblem(null);
        }}
        title="Make an access key"
        description="It acts in your name for reading and engineer's work. Decisions and people stay with the browser."
        confirm="Make the key"
        password
        oneTimeCode={oneTimeCode}
        onConfirm={make}
      >
        <TextInput
          label="What it is for"
          name="name"
          required
          maxLength={80}
          autoComplete="off"
          help="As “nightly export”; it tells your keys apart."
          error={errorAt(problem, "/name")}
        />
        <Select label="Works for" name="expiresInDays" options={lifetimes} defaultValue="90" />
      </ConfirmDialog>
      <Dialog
        open={made !== undefined}
        onOpenChange={(next) => !next && close()}
        title="Your new key"
        description="It is shown this once. Copy it now to where it is used; nobody can look it up later."
      >
        {made ? (
          <>
            <p className="flex items-start gap-2 rounded border border-rule bg-sunk p-3">
              <code className="min-w-0 flex-1 font-mono text-sm break-all select-all">{made.key}</code>
              <CopyButton text={made.key} name="key" />
            </p>
            <p className="mt-2 text-sm text-ink-soft">
              {made.name}, works until {formatDate(made.expiresAt)}.
            </p>
            <div className="mt-3 flex justify-end">
              <Button look="primary" onClick={close}>
                I have copied it
              </Button>
            </div>
          </>
        ) : null}
      </Dialog>
    </>
  );
}
