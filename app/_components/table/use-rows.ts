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
 * @param all everything is needed, as for sorting and filtering: pages are then fetched one after the other.
 * @param toRow makes the shown row of an answered one.
 */
export function useRows(
  given: readonly Row[] | undefined,
  endpoint: string | undefined,
  all: boolean,
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
  useEffect(() => {
    if (all && hasNextPage && !isFetching && !error) void fetchNextPage();
  }, [all, hasNextPage, isFetching, error, fetchNextPage]);

  const pages = query.data?.pages;
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
