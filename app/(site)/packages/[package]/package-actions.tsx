"use client";

import { useRouter } from "next/navigation";
import { useState } from "react";
import type { ProblemDetails } from "@/app/_components/api-client";
import { Button, type ButtonLook, LinkButton } from "@/app/_components/button";
import { type Confirmation, ConfirmDialog } from "@/app/_components/confirm-dialog";
import { useToast } from "@/app/_components/toast";
import type { ActionResult } from "@/lib/http/action";
import { askReinstatementAction, movePackageAction } from "../actions";
import type { ActionName, ShownAction } from "./package-moves";

export interface PackageActionsProps {
  id: string;
  lot: string;
  version: string;
  /** At most two, the likelier one last. */
  actions: readonly ShownAction[];
  oneTimeCode: boolean;
}

interface Move {
  /** On the button and on the dialog's. */
  button: (version: string) => string;
  look: ButtonLook;
  title: (version: string) => string;
  description: string;
  reason: "required" | "optional" | "none";
  password: boolean;
  done: (version: string) => string;
}

const moves: Record<ActionName, Move> = {
  cancel: {
    button: () => "Cancel the build",
    look: "danger",
    title: (version) => `Cancel the build of ${version}`,
    description: "Nothing of it is kept, and its number is not used again. Another build can be started at once.",
    reason: "none",
    password: false,
    done: (version) => `The build of ${version} is cancelled`,
  },
  submit: {
    button: () => "Ask for review",
    look: "primary",
    title: (version) => `Ask for the review of package ${version}`,
    description:
      "A reviewer who had no hand in it decides. What is live at this moment is what it is compared with; who made it is frozen.",
    reason: "none",
    password: false,
    done: (version) => `Package ${version} waits for a reviewer`,
  },
  "take-back": {
    button: () => "Take back",
    look: "quiet",
    title: (version) => `Take package ${version} back`,
    description: "It becomes a draft again. A signature that was given over it counts no more.",
    reason: "none",
    password: false,
    done: (version) => `Package ${version} is a draft again`,
  },
  release: {
    button: (version) => `Release ${version}`,
    look: "primary",
    title: (version) => `Release ${version}`,
    description:
      "From this moment stations write these bytes, and the release before is superseded. The release is signed with this installation's key.",
    reason: "optional",
    password: true,
    done: (version) => `Release ${version} is live`,
  },
  withdraw: {
    button: () => "Withdraw",
    look: "danger",
    title: (version) => `Withdraw release ${version}`,
    description:
      "Stations stop writing it at their next question, and nothing is live for the lot until another release is. It can't be undone: a withdrawn package is never live again.",
    reason: "required",
    password: true,
    done: (version) => `Release ${version} is withdrawn`,
  },
  reinstate: {
    button: () => "Ask for reinstatement",
    look: "outline",
    title: (version) => `Ask to make release ${version} live again`,
    description:
      "A reviewer other than you decides. Devices that carry other values than this release then stand on the re-write list.",
    reason: "required",
    password: true,
    done: (version) => `Reinstatement of ${version} waits for a second person`,
  },
};

/** What can be done with a package now: each move asks first, with reason and password where it is signed. */
export function PackageActions({ id, lot, version, actions, oneTimeCode }: PackageActionsProps) {
  const router = useRouter();
  const tell = useToast();
  const [asking, setAsking] = useState<ActionName>();
  const move = asking && moves[asking];

  const confirm = async (values: Confirmation): Promise<ProblemDetails | null> => {
    if (!asking) return null;
    const result: ActionResult =
      asking === "reinstate"
        ? await askReinstatementAction(lot, { package: id, ...values })
        : await movePackageAction(id, asking, values);
    if (!result.ok) return result.problem;
    tell({ tone: "good", title: moves[asking].done(version) });
    router.refresh();
    return null;
  };

  return (
    <>
      {actions.map((action) =>
        "href" in action ? (
          <LinkButton key={action.href} href={action.href} look={action.look} download={action.download}>
            {action.words}
          </LinkButton>
        ) : (
          <Button
            key={action.move}
            look={moves[action.move].look}
            disabled={action.hindrance !== undefined}
            title={action.hindrance}
            onClick={() => setAsking(action.move)}
          >
            {moves[action.move].button(version)}
          </Button>
        ),
      )}
      {move ? (
        <ConfirmDialog
          open
          onOpenChange={(open) => !open && setAsking(undefined)}
          title={move.title(version)}
          description={move.description}
          confirm={move.button(version)}
          danger={move.look === "danger"}
          reason={move.reason}
          password={move.password}
          oneTimeCode={oneTimeCode && move.password}
          onConfirm={confirm}
        />
      ) : null}
    </>
  );
}
