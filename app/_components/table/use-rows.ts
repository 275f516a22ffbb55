"use client";

import { useInfiniteQuery } from "@tanstack/react-query";
import { useEffect, useMemo } from "react";
import { callApi } from "@/app/_components/api-client";
import type { Row } from "@/app/_components/table/column";

interface Page {
  items: Row[];
  next: string | null;
}

export interface LoadedRows {
  rows: readonly Row[];
  /** Nothing is left on the server. */
  complete: boolean;
  loading: boolean;
  error: Error | null;
  loadMore: () => void;
  retry: () => void;
}

const pageSize = 500;

/**
 * Rows of a page, or of an API list page by page.
 * @param needed so many rows are needed, without end for sorting and filtering: pages are then fetched one after the other.
 * @param toRow makes the shown row of an answered one.
 */
export function useRows(
  given: readonly Row[] | undefined,
  endpoint: string | undefined,
  needed: number,
  toRow?: (row: Row) => Row,
): LoadedRows {
  const query = useInfiniteQuery({
    queryKey: ["list", endpoint],
    enabled: endpoint !== undefined,
    initialPageParam: "",
    queryFn: ({ pageParam, signal }) => callApi<Page>(pageAddress(endpoint ?? "", pageParam), { signal }),
    getNextPageParam: (last) => last.next ?? undefined,
  });
  const { hasNextPage, isFetching, error, fetchNextPage, refetch } = query;
  const pages = query.data?.pages;
  const count = pages?.reduce((sum, page) => sum + page.items.length, 0) ?? 0;
  useEffect(() => {
    if (count < needed && hasNextPage && !isFetching && !error) void fetchNextPage();
  }, [count, needed, hasNextPage, isFetching, error, fetchNextPage]);

  const loaded = useMemo(() => {
    const answered = pages?.flatMap((page) => page.items) ?? [];
    return toRow ? answered.map(toRow) : answered;
  }, [pages, toRow]);
  if (given) return { rows: given, complete: true, loading: false, error: null, loadMore: nothing, retry: nothing };
  return {
    rows: loaded,
    complete: !hasNextPage && !query.isPending,
    loading: isFetching,
    error,
    loadMore: () => hasNextPage && !isFetching && void fetchNextPage(),
    retry: () => void (pages ? fetchNextPage() : refetch()),
  };
}

function nothing(): void {}

function pageAddress(endpoint: string, cursor: string): string {
  const url = new URL(endpoint, window.location.origin);
  url.searchParams.set("limit", String(pageSize));
  if (cursor) url.searchParams.set("cursor", cursor);
  return url.pathname + url.search;
}
