"use client";

import { useRouter } from "next/navigation";
import { useState } from "react";
import { Button } from "@/app/_components/button";
import { type Confirmation, ConfirmDialog } from "@/app/_components/confirm-dialog";
import { useToast } from "@/app/_components/toast";
import type { PersonView } from "@/schemas/api/people";
import { changePersonAction, sendLinkAction } from "../actions";

type Move = "link" | "deactivate" | "activate";

/** A new link, and the end or return of somebody's access. */
export function PersonActions({ person, oneTimeCode }: { person: PersonView; oneTimeCode: boolean }) {
  const router = useRouter();
  const tell = useToast();
  const [move, setMove] = useState<Move>();
  const words = wordsOf(person);

  const act = async ({ password, oneTimeCode: code }: Confirmation) => {
    const signed = { password, oneTimeCode: code };
    const result =
      move === "link"
        ? await sendLinkAction(person.id, signed)
        : await changePersonAction(person.id, { ...signed, active: move === "activate" });
    if (!result.ok) return result.problem;
    if (move) tell({ tone: "good", title: words[move].done });
    router.refresh();
    return null;
  };

  return (
    <>
      {person.active ? (
        <>
          <Button look="danger" onClick={() => setMove("deactivate")}>
            Deactivate
          </Button>
          <Button onClick={() => setMove("link")}>Send a new link</Button>
        </>
      ) : (
        <Button look="primary" onClick={() => setMove("activate")}>
          Activate again
        </Button>
      )}
      {move ? (
        <ConfirmDialog
          open
          onOpenChange={(open) => !open && setMove(undefined)}
          title={words[move].title}
          description={words[move].description}
          confirm={words[move].confirm}
          danger={move === "deactivate"}
          password
          oneTimeCode={oneTimeCode}
          onConfirm={act}
        />
      ) : null}
    </>
  );
}

function wordsOf({
  name,
  email,
  signIn,
}: PersonView): Record<Move, Record<"title" | "description" | "confirm" | "done", string>> {
  const code = signIn?.oneTimeCode ? " Using it takes their one-time code away." : "";
  return {
    link: {
      title: `Send ${name} a new link`,
      description: `It goes to ${email} and works once, for a week. Earlier links stop working at once; the password stays until it is used.${code}`,
      confirm: "Mail the link",
      done: `A link goes to ${email}`,
    },
    deactivate: {
      title: `Deactivate ${name}`,
      description:
        "Sessions, keys and links end at once, and so do the roles reviewer and admin. What they made and signed stays.",
      confirm: `Deactivate ${name}`,
      done: `${name} is deactivated`,
    },
    activate: {
      title: `Activate ${name} again`,
      description: "They sign in with their password again. Reviewer and admin have to be asked for anew.",
      confirm: `Activate ${name}`,
      done: `${name} is active again`,
    },
  };
}
