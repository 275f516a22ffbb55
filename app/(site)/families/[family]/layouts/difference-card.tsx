"use client";

import { useQuery } from "@tanstack/react-query";
import { useMemo, useState } from "react";
import { callApi } from "@/app/_components/api-client";
import { layoutStep } from "@/lib/domain/semver-step";
import type { LayoutView } from "@/lib/services/layouts/get-layout";
import type { LayoutDocument } from "@/schemas/documents/layout";
import type { Judged } from "./judge-text";
import { Differences } from "./judged-cards";

export interface OtherVersion {
  version: string;
  state: string;
}

interface DifferenceCardProps {
  family: string;
  judged: Judged;
  /** Every other version of the family. */
  others: readonly OtherVersion[];
}

/** The differences to the version that the step is judged against, or to any other one. */
export function DifferenceCard({ family, judged, others }: DifferenceCardProps) {
  const [chosen, setChosen] = useState<string>();
  const against = chosen ?? judged.previous ?? others[0]?.version ?? null;
  const { data } = useQuery({
    queryKey: ["layout", family, against],
    enabled: against !== null && against !== judged.previous,
    queryFn: ({ signal }) => callApi<LayoutView>(`/api/v1/families/${family}/layouts/${against}`, { signal }),
  });
  const other = against === judged.previous ? undefined : (data?.document as LayoutDocument | undefined);
  const compared = useMemo(
    () => (other && judged.layout ? layoutStep(other, judged.layout) : null),
    [other, judged.layout],
  );
  if (others.length === 0 || against === null) return null;
  const shown = against === judged.previous ? { reasons: judged.reasons, step: judged.step } : compared;
  return (
    <Differences
      against={against}
      reasons={shown?.reasons ?? []}
      step={shown?.step ?? null}
      waiting={!shown || judged.layout === null}
      choice={
        <label className="flex items-center gap-2 print:hidden">
          Compare with
          <select
            value={against}
            onChange={(event) => setChosen(event.currentTarget.value)}
            className="h-8 rounded border border-ink-faint bg-paper px-2 font-mono text-ink"
          >
            {others.map(({ version, state }) => (
              <option key={version} value={version}>
                {version}, {state.replace("-", " ")}
              </option>
            ))}
          </select>
        </label>
      }
    />
  );
}
