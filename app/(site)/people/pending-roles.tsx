"use client";

import { useRouter } from "next/navigation";
import { useState } from "react";
import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { type Confirmation, ConfirmDialog } from "@/app/_components/confirm-dialog";
import { TimeText } from "@/app/_components/time-text";
import { useToast } from "@/app/_components/toast";
import type { PersonView } from "@/schemas/api/people";
import { decideRoleAction } from "./actions";
import { roleWords } from "./role-words";

interface Waiting {
  person: PersonView;
  pending: PersonView["pending"][number];
}

export interface PendingRolesProps {
  people: readonly PersonView[];
  /** Whoever looks, an admin. */
  me: string;
  oneTimeCode: boolean;
}

/** Roles that wait for a second admin, each to be confirmed or refused by one who didn't ask. */
export function PendingRoles({ people, me, oneTimeCode }: PendingRolesProps) {
  const [asking, setAsking] = useState<Waiting & { decision: "confirm" | "refuse" }>();
  const waiting = people.flatMap((person) => person.pending.map((pending) => ({ person, pending })));
  if (waiting.length === 0) return null;
  return (
    <Card title="Waits for a second admin" look="caution">
      <ul>
        {waiting.map((one) => (
          <li
            key={`${one.person.id}${one.pending.role}`}
            className="flex flex-wrap items-center gap-x-4 gap-y-2 border-t border-rule py-2.5 first:border-t-0 first:pt-0 last:pb-0"
          >
            <div className="min-w-0 flex-1 basis-64">
              <p>
                <span className="font-semibold">{one.person.name}</span> is to become{" "}
                <span className="font-semibold">{one.pending.role}</span>
              </p>
              <p className="text-sm text-ink-soft">
                {one.pending.askedBy} asked on <TimeText at={one.pending.askedAt} />
              </p>
            </div>
            <Decide one={one} me={me} onAsk={(decision) => setAsking({ ...one, decision })} />
          </li>
        ))}
      </ul>
      {asking ? <DecideDialog asking={asking} oneTimeCode={oneTimeCode} onClose={() => setAsking(undefined)} /> : null}
    </Card>
  );
}

function Decide({ one, me, onAsk }: { one: Waiting; me: string; onAsk: (decision: "confirm" | "refuse") => void }) {
  if (one.person.id === me) return <p className="text-sm text-ink-soft">Others decide on your own roles.</p>;
  const own = one.pending.askedById === me;
  return (
    <div className="flex flex-wrap items-center gap-2.5">
      {own ? <p className="text-sm text-ink-soft">Another admin confirms it.</p> : null}
      <Button onClick={() => onAsk("refuse")}>{own ? "Take back" : "Refuse"}</Button>
      {own ? null : (
        <Button look="outline" onClick={() => onAsk("confirm")}>
          Confirm
        </Button>
      )}
    </div>
  );
}

interface DecideDialogProps {
  asking: Waiting & { decision: "confirm" | "refuse" };
  oneTimeCode: boolean;
  onClose: () => void;
}

function DecideDialog({ asking, oneTimeCode, onClose }: DecideDialogProps) {
  const router = useRouter();
  const tell = useToast();
  const { person, pending, decision } = asking;
  const confirms = decision === "confirm";

  const decide = async (values: Confirmation) => {
    const result = await decideRoleAction(person.id, pending.role, decision, values);
    if (!result.ok) return result.problem;
    const title = confirms ? `${person.name} is ${pending.role} now` : `${person.name} does not become ${pending.role}`;
    tell({ tone: "good", title });
    router.refresh();
    return null;
  };

  return (
    <ConfirmDialog
      open
      onOpenChange={(open) => !open && onClose()}
      title={confirms ? `Confirm ${person.name} as ${pending.role}` : `Leave ${person.name} without ${pending.role}`}
      description={confirms ? `${roleWords[pending.role]}. It acts at once.` : "The role can be asked for again later."}
      confirm={confirms ? `Make ${person.name} ${pending.role}` : "Refuse the role"}
      danger={!confirms}
      reason={confirms ? "none" : "optional"}
      password
      oneTimeCode={oneTimeCode}
      onConfirm={decide}
    />
  );
}
