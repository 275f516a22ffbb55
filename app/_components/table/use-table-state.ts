"use client";

import { usePathname, useSearchParams } from "next/navigation";
import { useMemo } from "react";

export interface TableState {
  /** Key of a column and the direction. */
  sort?: { key: string; descending: boolean };
  /** Id of the chosen chip. */
  chip?: string;
  /** Text that some cell has to contain. */
  text: string;
  /** Keys of the columns shown; undefined for those that the page shows by itself. */
  columns?: string[];
}

/**
 * State of a table in the address, so that a view can be linked and kept: `sort=-gainTc`, `show=live`, `find=0001`,
 * `columns=a,b`, each with the table's name in front where the page has several.
 */
export function useTableState(name: string | undefined): [TableState, (change: Partial<TableState>) => void] {
  const path = usePathname();
  const params = useSearchParams();
  const prefix = name ? `${name}.` : "";
  const state = useMemo(() => readState(params, prefix), [params, prefix]);

  const change = (part: Partial<TableState>) => {
    const next = { ...state, ...part };
    const query = new URLSearchParams(window.location.search);
    const set = (key: string, value: string | undefined) =>
      value ? query.set(prefix + key, value) : query.delete(prefix + key);
    set("sort", next.sort && (next.sort.descending ? "-" : "") + next.sort.key);
    set("show", next.chip);
    set("find", next.text);
    set("columns", next.columns?.join(","));
    window.history.replaceState(null, "", query.size ? `${path}?${query}` : path);
  };
  return [state, change];
}

function readState(params: URLSearchParams, prefix: string): TableState {
  const sort = params.get(`${prefix}sort`);
  return {
    sort: sort ? { key: sort.replace(/^-/, ""), descending: sort.startsWith("-") } : undefined,
    chip: params.get(`${prefix}show`) ?? undefined,
    text: params.get(`${prefix}find`) ?? "",
    columns: params.get(`${prefix}columns`)?.split(","),
  };
}
