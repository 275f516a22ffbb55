"use client";

import { useRouter } from "next/navigation";
import { useState } from "react";
import { problemOf } from "@/app/_components/api-client";
import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { TimeText } from "@/app/_components/time-text";
import { useToast } from "@/app/_components/toast";
import type { ActionResult } from "@/lib/http/action";
import type { SessionView } from "@/schemas/api/account";
import { endOtherSessionsAction, endSessionAction } from "./actions";
import { browserOf } from "./browser-of";

/** Where one is signed in, and a way to end it from here. */
export function SessionsCard({ sessions }: { sessions: readonly SessionView[] }) {
  const router = useRouter();
  const tell = useToast();
  const [ending, setEnding] = useState<string>();

  const end = async (id: string, done: string, work: () => Promise<ActionResult>) => {
    setEnding(id);
    try {
      const result = await work();
      if (result.ok) tell({ tone: "good", title: done });
      else tell({ tone: "bad", title: result.problem.title, text: result.problem.detail });
      router.refresh();
    } catch (error) {
      tell({ tone: "bad", title: "The session may still last", text: problemOf(error).title });
    } finally {
      setEnding(undefined);
    }
  };
  const endOthers = sessions.length > 1 && (
    <Button pending={ending === "all"} onClick={() => end("all", "Other sessions ended", endOtherSessionsAction)}>
      End all others
    </Button>
  );

  return (
    <Card title="Sessions" note="end 12 hours after sign-in" aside={endOthers}>
      <ul>
        {sessions.map((session) => (
          <li key={session.id} className="flex items-center gap-4 border-t border-rule py-2.5 first:border-t-0">
            <div className="min-w-0 flex-1">
              <p className="font-semibold" title={session.userAgent}>
                {browserOf(session.userAgent)}
                {session.current ? <span className="font-normal text-verdigris"> · this one</span> : null}
              </p>
              <p className="text-sm text-ink-soft">
                signed in <TimeText at={session.createdAt} />, last seen <TimeText at={session.lastSeenAt} />
                {session.address ? (
                  <>
                    {" "}
                    from <span className="font-mono">{session.address}</span>
                  </>
                ) : null}
              </p>
            </div>
            {session.current ? null : (
              <Button
                look="danger"
                pending={ending === session.id}
                onClick={() => end(session.id, "Session ended", () => endSessionAction(session.id))}
              >
                End it
              </Button>
            )}
          </li>
        ))}
      </ul>
    </Card>
  );
}
