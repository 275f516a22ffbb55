"use client";

import { useQuery, useQueryClient } from "@tanstack/react-query";
import { callApi } from "@/app/_components/api-client";
import { windowQuery } from "@/app/_components/table/use-windows";
import type { ComparisonOverview } from "@/schemas/api/compare";

/** The list of the serials that differ, by serial. */
export const serialsOf = (from: string, to: string) => `/api/v1/compare/serials?from=${from}&to=${to}`;

/**
 * What two packages differ in, in figures. It is known only after all serials were compared, so it is asked for when the first
 * rows are there: counting would stand in their way.
 */
export function useComparison(from: string, to: string) {
  const client = useQueryClient();
  return useQuery({
    queryKey: ["comparison", from, to],
    queryFn: async ({ signal }) => {
      // Why rows can't be had is told where they stand.
      await client.ensureQueryData(windowQuery(serialsOf(from, to), 0)).catch(() => undefined);
      return callApi<ComparisonOverview>(`/api/v1/compare/overview?from=${from}&to=${to}`, { signal });
    },
    staleTime: Number.POSITIVE_INFINITY,
  });
}
