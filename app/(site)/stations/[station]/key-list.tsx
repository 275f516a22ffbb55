"use client";

import { useRouter } from "next/navigation";
import { useState } from "react";
import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { type Confirmation, ConfirmDialog } from "@/app/_components/confirm-dialog";
import { CopyButton } from "@/app/_components/copy-button";
import { Notice } from "@/app/_components/notice";
import { StateMark } from "@/app/_components/state/state-mark";
import { TimeText } from "@/app/_components/time-text";
import { useToast } from "@/app/_components/toast";
import type { StationView } from "@/lib/services/stations/manage-stations";
import { endKeyAction, makeKeyAction } from "../actions";

export interface KeyListProps {
  station: StationView;
  admin: boolean;
  oneTimeCode: boolean;
}

/** Keys of a station. A new one is shown this once; only its hash is stored. */
export function KeyList({ station, admin, oneTimeCode }: KeyListProps) {
  const router = useRouter();
  const tell = useToast();
  const [making, setMaking] = useState(false);
  const [ending, setEnding] = useState<string>();
  const [made, setMade] = useState<string>();

  const make = async ({ password, oneTimeCode: code }: Confirmation) => {
    const result = await makeKeyAction(station.id, { password, ...(code && { oneTimeCode: code }) });
    if (!result.ok) return result.problem;
    setMade(result.value.key);
    router.refresh();
    return null;
  };
  const end = async () => {
    const result = await endKeyAction(station.id, ending ?? "");
    if (!result.ok) return result.problem;
    tell({ tone: "good", title: "The key has ended" });
    router.refresh();
    return null;
  };

  return (
    <Card
      title="Keys"
      aside={
        admin ? (
          <Button look={station.keys.length === 0 ? "primary" : "outline"} onClick={() => setMaking(true)}>
            Make a key
          </Button>
        ) : undefined
      }
    >
      {made ? (
        <div className="mb-3">
          <Notice tone="caution" title="Copy it now: it is never shown again">
            <p className="flex items-start gap-2 rounded bg-sunk px-3 py-2">
              <code className="min-w-0 flex-1 font-mono wrap-anywhere">{made}</code>
              <CopyButton text={made} name="key" />
            </p>
            <p className="mt-2">
              Enter it at {station.name} and nowhere else. Whoever has it can report writes as this station.{" "}
              <Button onClick={() => setMade(undefined)}>I have put it in</Button>
            </p>
          </Notice>
        </div>
      ) : null}
      {station.keys.length === 0 && !made ? (
        <p className="text-sm text-ink-soft">
          No key yet: without one the station can neither ask what is live nor report.
        </p>
      ) : (
        <ul className="text-sm">
          {station.keys.map((key) => (
            <li
              key={key.id}
              className="flex flex-wrap items-center gap-x-4 gap-y-1 border-b border-rule/55 py-2 last:border-0"
            >
              <span className="font-mono">{key.prefix}…</span>
              {key.revokedAt ? <StateMark tone="idle" word="ended" /> : <StateMark tone="good" word="in use" />}
              <span className="text-ink-soft">
                made <TimeText at={key.createdAt} />,{" "}
                {key.revokedAt ? (
                  <>
                    ended <TimeText at={key.revokedAt} />
                  </>
                ) : key.lastUsedAt ? (
                  <>
                    last used <TimeText at={key.lastUsedAt} />
                  </>
                ) : (
                  "never used"
                )}
              </span>
              {admin && !key.revokedAt ? (
                <span className="ml-auto">
                  <Button look="danger" onClick={() => setEnding(key.id)}>
                    End it
                  </Button>
                </span>
              ) : null}
            </li>
          ))}
        </ul>
      )}
      <ConfirmDialog
        open={making}
        onOpenChange={setMaking}
        title={`Make a key for ${station.name}`}
        description="It is shown once. Keys that are in use stay good; end the old one when the new one is in."
        confirm="Make the key"
        password
        oneTimeCode={oneTimeCode}
        onConfirm={make}
      />
      <ConfirmDialog
        open={ending !== undefined}
        onOpenChange={(open) => !open && setEnding(undefined)}
        title="End this key"
        description="It is refused at once and for ever. Records that the station has not sent yet need another key."
        confirm="End the key"
        danger
        onConfirm={end}
      />
    </Card>
  );
}
