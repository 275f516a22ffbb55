"use client";

import { useState } from "react";
import { callApi, type ProblemDetails, problemOf } from "@/app/_components/api-client";
import type { ComparableResult } from "@/lib/domain/compensation/derivation-effect";
import type { DerivationPreview } from "@/schemas/api/derivations";
import { bodyOf, type DeriveOptions, type LikeDerivation } from "./derive-options";

export interface Previewed {
  preview: DerivationPreview;
  /** What it is held against; undefined where there is nothing to hold it against. */
  against?: { name: string; result: ComparableResult };
}

/**
 * Computes what options would give, without storing anything. It is held against the derivation that the options come from,
 * else, where devices are left out, against the same options with all of them in.
 */
export function usePreview(lot: string, like: LikeDerivation | undefined) {
  const [pending, setPending] = useState(false);
  const [previewed, setPreviewed] = useState<Previewed>();
  const [problem, setProblem] = useState<ProblemDetails>();
  const path = `/api/v1/lots/${encodeURIComponent(lot)}/derivations?preview=true`;
  const compute = (options: DeriveOptions) =>
    callApi<DerivationPreview>(path, { method: "POST", json: bodyOf(options) });

  const show = async (options: DeriveOptions) => {
    setPending(true);
    setProblem(undefined);
    try {
      const preview = await compute(options);
      if (like) setPreviewed({ preview, against: { name: like.title, result: like.result } });
      else if (options.exclusions.length === 0) setPreviewed({ preview });
      else {
        const result = await compute({ ...options, exclusions: [] });
        setPreviewed({ preview, against: { name: "With all devices in", result } });
      }
    } catch (error) {
      setPreviewed(undefined);
      setProblem(problemOf(error));
    }
    setPending(false);
  };
  return { pending, previewed, problem, show, clear: () => setPreviewed(undefined) };
}
