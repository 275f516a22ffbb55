"use client";

import { type ReactNode, useState } from "react";
import { type ProblemDetails, problemOf } from "@/app/_components/api-client";
import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { type Confirmation, readConfirmation } from "@/app/_components/confirm-dialog";
import { FormError } from "@/app/_components/form/form-error";
import { PasswordConfirm, passwordErrors } from "@/app/_components/form/password-confirm";
import { SealMark } from "@/app/_components/seal-mark";

export interface SigningPanelProps {
  title?: string;
  /** Digest that is signed; its seal is drawn. Left out where what is signed has none yet. */
  digest?: string;
  /** What the signature says, in plain words and the first person. */
  statement: string;
  /** What changed, checks and waivers. */
  changes?: ReactNode;
  /** The differences were opened. Until then the button stays disabled and says why. */
  reviewed: boolean;
  /** What has to be opened first. */
  reviewHint?: string;
  /** The outcome: "Approve release 1.2.0". */
  confirm: string;
  oneTimeCode?: boolean;
  /** Who signs, over what, and who can't. */
  note?: ReactNode;
  /** Further fields, as acknowledgements. */
  children?: ReactNode;
  onSign: (values: Confirmation, form: FormData) => Promise<ProblemDetails | null | undefined>;
}

/** Full-width panel of a signature: what is signed, what changed, the statement, then the password. */
export function SigningPanel(props: SigningPanelProps) {
  const { digest, statement, changes, reviewed, confirm, oneTimeCode, note, children } = props;
  const [pending, setPending] = useState(false);
  const [problem, setProblem] = useState<ProblemDetails | null>(null);

  const send = async (form: FormData) => {
    setPending(true);
    const result = await props.onSign(readConfirmation(form), form).catch(problemOf);
    setPending(false);
    setProblem(result ?? null);
  };

  return (
    <Card title={props.title} look="sealed">
      <div className="@container">
        <div className="grid gap-x-8 gap-y-3 @3xl:grid-cols-2">
          <div className="flex flex-col gap-3">
            {digest ? <SealMark digest={digest} /> : null}
            {changes}
          </div>
          <form
            className="flex flex-col gap-3"
            onSubmit={(event) => {
              event.preventDefault();
              void send(new FormData(event.currentTarget));
            }}
          >
            <p className="border-l-2 border-verdigris py-0.5 pl-3">{statement}</p>
            {children}
            <PasswordConfirm oneTimeCode={oneTimeCode} {...passwordErrors(problem)} />
            <FormError problem={problem} />
            <Button type="submit" look="primary" wide disabled={!reviewed} pending={pending}>
              {confirm}
            </Button>
            {reviewed ? null : (
              <p className="text-sm font-medium text-ochre" role="status">
                {props.reviewHint ?? "Open what changes first; then you can sign."}
              </p>
            )}
            {note ? <div className="text-sm text-ink-soft">{note}</div> : null}
          </form>
        </div>
      </div>
    </Card>
  );
}
