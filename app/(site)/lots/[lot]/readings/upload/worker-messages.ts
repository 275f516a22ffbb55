/** What the page and the worker that reads a file say to each other. */
import type { FamilyRules, Purpose } from "@/lib/domain/compensation/types";
import type { CheckedTable } from "@/lib/domain/readings/check-table";
import type { Delimiter } from "@/lib/domain/readings/delimited-text";
import type { Encoding } from "@/lib/domain/readings/encoding";
import type { GivenRow } from "@/lib/domain/readings/given-table";
import type { ColumnMap, MapOptions } from "@/lib/domain/readings/map-table";

/** What decides how a file is cut into a table; what is left out is found in the file. */
export interface TableOptions {
  encoding?: Encoding;
  delimiter?: Delimiter;
  sheet?: string;
  headerRow?: boolean;
}

/** A file as a table. */
export interface TableFacts {
  /** Null for a workbook. */
  encoding: Encoding | null;
  delimiter: Delimiter | null;
  /** Names of a workbook's sheets, with the one that is read; empty and null for a text. */
  sheets: string[];
  sheet: string | null;
  headerRow: boolean;
  names: string[];
  /** Rows below the header. */
  rows: number;
  /** The first of them. */
  first: GivenRow[];
  decimalComma: boolean;
  days1904: boolean;
}

export interface CheckOptions {
  map: ColumnMap;
  options: MapOptions;
  purpose: Purpose;
  rules: FamilyRules;
}

export interface Checked extends CheckedTable {
  /** What to send; null where the file is sent as it stands. */
  body: Blob | null;
  /** SHA-256 of the file where something else is sent; null too where the browser can't hash here. */
  sourceSha256: string | null;
  /** The given rows that errors name. */
  wrongRows: GivenRow[];
}

export type Ask =
  | ({ ask: "open"; file: File } & TableOptions)
  | ({ ask: "reread" } & TableOptions)
  | { ask: "check"; id: number; check: CheckOptions }
  | { ask: "rows"; id: number; sentRows: number[] };

export type Tell =
  | { tell: "progress"; step: "reading" | "checking"; share: number }
  | { tell: "table"; facts: TableFacts }
  | { tell: "checked"; id: number; checked: Checked }
  /** Rows of the given file by the line of what was sent. */
  | { tell: "rows"; id: number; rows: Record<number, GivenRow> }
  | { tell: "failed"; message: string };
