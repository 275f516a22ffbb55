"use client";

import { useRouter } from "next/navigation";
import { type FormEvent, useState } from "react";
import type { ProblemDetails } from "@/app/_components/api-client";
import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { type Confirmation, ConfirmDialog } from "@/app/_components/confirm-dialog";
import { CopyButton } from "@/app/_components/copy-button";
import { FormError } from "@/app/_components/form/form-error";
import { TextInput } from "@/app/_components/form/text-input";
import { StateMark } from "@/app/_components/state/state-mark";
import { useToast } from "@/app/_components/toast";
import type { OneTimeSecret } from "@/schemas/api/account";
import { beginOneTimeCodeAction, confirmOneTimeCodeAction, removeOneTimeCodeAction } from "./actions";

/** One-time codes: enrol with an authenticator app, or take them away. */
export function OneTimeCard({ enrolled }: { enrolled: boolean }) {
  const router = useRouter();
  const tell = useToast();
  const [asking, setAsking] = useState(false);
  const [secret, setSecret] = useState<OneTimeSecret>();

  const act = async ({ password, oneTimeCode }: Confirmation) => {
    if (!enrolled) {
      const begun = await beginOneTimeCodeAction(password ?? "");
      if (!begun.ok) return begun.problem;
      setSecret(begun.value);
      return null;
    }
    const removed = await removeOneTimeCodeAction({ password, oneTimeCode });
    if (!removed.ok) return removed.problem;
    tell({ tone: "good", title: "One-time codes removed" });
    router.refresh();
    return null;
  };
  const finish = () => {
    setSecret(undefined);
    tell({ tone: "good", title: "One-time codes enrolled", text: "Signing in and decisions ask for one from now on." });
    router.refresh();
  };

  return (
    <Card title="One-time code" aside={enrolled ? <StateMark tone="good" word="enrolled" /> : undefined}>
      {secret && !enrolled ? (
        <Enrol secret={secret} onDone={finish} onLeave={() => setSecret(undefined)} />
      ) : (
        <>
          <p className="text-sm text-ink-soft">
            {enrolled
              ? "Signing in and decisions ask for a code besides the password. With the phone lost, another admin sends you a link that takes the code away."
              : "A second proof that it is you: six digits from an authenticator app, asked for at sign-in and with every decision."}
          </p>
          <div className="mt-3 flex justify-end">
            <Button look={enrolled ? "danger" : "outline"} onClick={() => setAsking(true)}>
              {enrolled ? "Remove one-time codes" : "Enrol one-time codes"}
            </Button>
          </div>
        </>
      )}
      <ConfirmDialog
        open={asking}
        onOpenChange={setAsking}
        title={enrolled ? "Remove one-time codes" : "Enrol one-time codes"}
        description={
          enrolled ? "From then on the password alone is asked for." : "Have your authenticator app at hand."
        }
        confirm={enrolled ? "Remove them" : "Show the secret"}
        danger={enrolled}
        password
        oneTimeCode={enrolled}
        onConfirm={act}
      />
    </Card>
  );
}

function Enrol({ secret, onDone, onLeave }: { secret: OneTimeSecret; onDone: () => void; onLeave: () => void }) {
  const [problem, setProblem] = useState<ProblemDetails | null>(null);
  const [pending, setPending] = useState(false);
  const send = async (event: FormEvent<HTMLFormElement>) => {
    event.preventDefault();
    const code = String(new FormData(event.currentTarget).get("code"));
    setPending(true);
    const result = await confirmOneTimeCodeAction(code);
    setPending(false);
    if (result.ok) return onDone();
    setProblem(result.problem);
  };
  const wrong = problem?.code === "auth.code_wrong" ? problem.detail : undefined;
  return (
    <form onSubmit={send} className="flex flex-col gap-3">
      <p className="text-sm text-ink-soft">Scan this with your authenticator app, or type the secret into it.</p>
      {/** biome-ignore lint/performance/noImgElement: an inline drawing needs no image service */}
      <img
        src={`data:image/svg+xml;utf8,${encodeURIComponent(secret.qrSvg)}`}
        alt="QR code of the secret"
        className="size-[190px] self-center rounded border border-rule"
      />
      <p className="flex items-start gap-2 rounded border border-rule bg-sunk p-2.5">
        <code className="min-w-0 flex-1 font-mono text-sm break-all select-all">{spaced(secret.secret)}</code>
        <CopyButton text={secret.secret} name="secret" />
      </p>
      <TextInput
        label="Code that the app shows now"
        name="code"
        inputMode="numeric"
        autoComplete="one-time-code"
        pattern="[0-9]{6}"
        title="Six digits"
        maxLength={6}
        required
        code
        error={wrong}
      />
      <FormError problem={problem} />
      <div className="flex flex-wrap justify-end gap-2.5">
        <Button onClick={onLeave}>Leave it</Button>
        <Button type="submit" look="primary" pending={pending}>
          Enrol
        </Button>
      </div>
    </form>
  );
}

/** In fours, as it is easier to type. */
function spaced(secret: string): string {
  return secret.replace(/(.{4})(?=.)/g, "$1 ");
}
