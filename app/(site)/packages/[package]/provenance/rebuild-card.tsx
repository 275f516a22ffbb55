"use client";

import { useQuery } from "@tanstack/react-query";
import Link from "next/link";
import { useRouter } from "next/navigation";
import { useEffect, useState } from "react";
import { callApi, type ProblemDetails, problemOf } from "@/app/_components/api-client";
import { Button } from "@/app/_components/button";
import { Card } from "@/app/_components/card";
import { FormError } from "@/app/_components/form/form-error";
import { StateMark } from "@/app/_components/state/state-mark";
import { TimeText } from "@/app/_components/time-text";
import { formatNumberOf } from "@/lib/domain/format/figure";
import type { PackageView } from "@/schemas/api/packages";

export interface RebuildCardProps {
  id: string;
  rebuild: PackageView["rebuild"];
  /** Who looks may ask for it. */
  mayAsk: boolean;
}

/** Builds the package once more from its inputs and says whether the bytes are the same. */
export function RebuildCard({ id, rebuild, mayAsk }: RebuildCardProps) {
  const router = useRouter();
  const [asked, setAsked] = useState(false);
  // Each asking is followed by itself: what came of an earlier one says nothing.
  const [times, setTimes] = useState(0);
  const [problem, setProblem] = useState<ProblemDetails | null>(null);
  const endpoint = `/api/v1/packages/${id}`;
  const { data } = useQuery({
    queryKey: ["rebuild", id, times],
    enabled: asked,
    queryFn: ({ signal }) => callApi<PackageView>(endpoint, { signal }),
    refetchInterval: ({ state }) => (state.data?.rebuild ? false : 1_500),
    staleTime: 0,
    gcTime: 0,
  });
  const ended = asked && data?.rebuild != null;
  useEffect(() => {
    if (!ended) return;
    setAsked(false);
    router.refresh();
  }, [ended, router]);

  const ask = async () => {
    setProblem(null);
    try {
      await callApi(`${endpoint}/rebuild`, { method: "POST" });
      setTimes(times + 1);
      setAsked(true);
    } catch (error) {
      setProblem(problemOf(error));
    }
  };
  const at = rebuild && "at" in rebuild && typeof rebuild.at === "string" ? rebuild.at : undefined;

  return (
    <Card title="Build it once more">
      <div className="flex flex-col gap-2 text-sm" aria-live="polite">
        <p className="text-ink-soft">
          The same inputs give the same bytes, on any machine: derived again from the readings as they were uploaded,
          every value has to come out as it was approved; composed again, everything has to end at the same digest.
        </p>
        {asked ? <StateMark tone="wait" word="building it again" /> : null}
        {!asked && rebuild ? (
          <p className="flex flex-wrap items-baseline gap-x-3">
            {rebuild.same ? (
              <StateMark tone="good" word="the same bytes" />
            ) : (
              <StateMark tone="bad" word="other bytes: report this with the package's id" />
            )}
            {at ? <TimeText at={at} /> : null}
          </p>
        ) : null}
        {asked ? null : <RepeatedDerivations rebuild={rebuild} />}
        <FormError problem={problem} />
        {mayAsk ? (
          <div>
            <Button pending={asked} pendingText="Building" onClick={() => void ask()}>
              Build again and compare
            </Button>
          </div>
        ) : null}
      </div>
    </Card>
  );
}

interface Repeated {
  id: string;
  done: boolean;
  reason?: string;
  devices: number;
  differing: number;
  serials: string[];
}

/** What became of deriving the coefficients anew. */
function RepeatedDerivations({ rebuild }: Pick<RebuildCardProps, "rebuild">) {
  const derivations = (rebuild && "derivations" in rebuild ? rebuild.derivations : []) as Repeated[];
  return derivations.map(({ id, done, reason, devices, differing, serials }) => (
    <p key={id}>
      <Link href={`/derivations/${id}`}>Derivation</Link>{" "}
      {!done
        ? `not derived again: ${reason}.`
        : differing === 0
          ? `derived again from its readings: the same values of ${formatNumberOf(devices, "device")}.`
          : `derived again from its readings: other values of ${formatNumberOf(differing, "device")}, ${serials.join(", ")} among them.`}
    </p>
  ));
}
