"use client";

import { useQuery } from "@tanstack/react-query";
import { callApi } from "@/app/_components/api-client";
import type { ComparisonOverview } from "@/schemas/api/compare";

/** What two packages differ in, in figures: known only after all serials were compared, so it comes after the first rows. */
export function useComparison(from: string, to: string) {
  return useQuery({
    queryKey: ["comparison", from, to],
    queryFn: ({ signal }) => callApi<ComparisonOverview>(`/api/v1/compare/overview?from=${from}&to=${to}`, { signal }),
    staleTime: Number.POSITIVE_INFINITY,
  });
}
