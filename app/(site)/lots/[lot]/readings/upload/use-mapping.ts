"use client";

import { useEffect, useState } from "react";
import type { Column } from "@/lib/domain/readings/columns";
import {
  ALL_COLUMNS,
  type ColumnMap,
  findMapping,
  type MapOptions,
  missingColumns,
  OFFSET,
  type ReadingMapping,
  suggestMap,
} from "@/lib/domain/readings/map-table";
import type { TableFacts } from "./worker-messages";

interface Mapping {
  map: ColumnMap;
  decimalComma: boolean;
  offset: string;
  /** Where it came from, told to whoever looks it over. */
  origin: "remembered" | "names" | "changed";
}

/** Which column of the table is which of ours: as remembered for the family, else by their names, then as somebody changes it. */
export function useMapping(facts: TableFacts | undefined, kept: ReadingMapping | null) {
  const [mapping, setMapping] = useState<Mapping>(() => startOf(facts, kept));
  useEffect(() => setMapping(startOf(facts, kept)), [facts, kept]);
  const { map, decimalComma, offset } = mapping;
  const options: MapOptions = { decimalComma, offset, days1904: facts?.days1904 ?? false };
  const offsetWrong = offset !== "" && !OFFSET.test(offset);
  const missing = facts ? missingColumns(map) : [];

  /** @param column ours, undefined where the table's is not used */
  const setColumn = (place: number, column: Column | undefined) => {
    const next: ColumnMap = { ...map };
    for (const one of ALL_COLUMNS) if (next[one] === place || one === column) delete next[one];
    if (column) next[column] = place;
    setMapping({ ...mapping, map: next, origin: "changed" });
  };
  const change = (values: Partial<Pick<Mapping, "decimalComma" | "offset">>) => setMapping({ ...mapping, ...values });
  const toKeep = (of: TableFacts): ReadingMapping => ({
    columns: namesOf(map, of.names),
    headerRow: of.headerRow,
    decimalComma,
    offset,
    encoding: of.encoding,
    delimiter: of.delimiter,
    sheet: of.sheet,
  });
  return {
    ...mapping,
    options,
    missing,
    offsetWrong,
    complete: missing.length === 0 && !offsetWrong,
    setColumn,
    change,
    toKeep,
  };
}

function startOf(facts: TableFacts | undefined, kept: ReadingMapping | null): Mapping {
  if (!facts) return { map: {}, decimalComma: false, offset: "", origin: "names" };
  const remembered = kept && kept.headerRow === facts.headerRow ? findMapping(kept.columns, facts.names) : undefined;
  const suggested = suggestMap(facts.names);
  // A table whose names are ours needs nothing remembered.
  if (!kept || !remembered || missingColumns(suggested).length === 0) {
    return { map: suggested, decimalComma: facts.decimalComma, offset: "", origin: "names" };
  }
  return { map: remembered, decimalComma: facts.decimalComma, offset: kept.offset, origin: "remembered" };
}

function namesOf(map: ColumnMap, names: readonly string[]): ReadingMapping["columns"] {
  const columns: ReadingMapping["columns"] = {};
  for (const column of ALL_COLUMNS) {
    const place = map[column];
    const name = place === undefined ? undefined : names[place];
    if (name !== undefined) columns[column] = name;
  }
  return columns;
}
