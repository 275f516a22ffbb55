"use client";

import {
  type ColumnDef,
  getCoreRowModel,
  getFilteredRowModel,
  getSortedRowModel,
  type Table,
  type Row as TableRow,
  useReactTable,
} from "@tanstack/react-table";
import { type ReactNode, useCallback, useMemo, useState } from "react";
import { Button } from "@/app/_components/button";
import { EmptyState } from "@/app/_components/empty-state";
import { orderPrint, usePrintWaits, useTellPrint } from "@/app/_components/print/use-print-order";
import { type DataColumn, type FilterChip, passes, type Row, textOf, valueAt } from "@/app/_components/table/column";
import { csvOf, saveCsv } from "@/app/_components/table/csv";
import { PrintedNote } from "@/app/_components/table/printed-note";
import { PRINTED_MAX } from "@/app/_components/table/printed-rows";
import { RowsFailed } from "@/app/_components/table/rows-failed";
import { TableBar } from "@/app/_components/table/table-bar";
import { TableGrid, virtualFrom } from "@/app/_components/table/table-grid";
import { type LoadedRows, useRows } from "@/app/_components/table/use-rows";
import { type TableState, useTableState } from "@/app/_components/table/use-table-state";
import { formatCount } from "@/lib/domain/format/figure";

export interface DataTableProps {
  /** What the rows are, as "devices": named in labels and in the CSV's file name. */
  name: string;
  /** In front of the address's parameters, where a page has several tables. */
  urlName?: string;
  columns: readonly DataColumn[];
  /** Rows the page already has … */
  rows?: readonly Row[];
  /** … or the API list that answers them, as `/api/v1/lots/MW20-2609/coefficients`. */
  endpoint?: string;
  /** How many rows the list has, where the page knows. */
  total?: number;
  /** Path of what names a row for ever; the first column where it is left out. */
  rowKey?: string;
  /** Page of a row, as `/trace/{serial}`. */
  rowHref?: string;
  /** Client pages: opens a row beside the table instead of on a page; `opened` is the key of the one shown. */
  onOpen?: (row: Row) => void;
  opened?: string;
  /** Client pages: makes the shown row of one that the endpoint answered. Has to stay the same function. */
  toRow?: (row: Row) => Row;
  chips?: readonly FilterChip[];
  sort?: { key: string; descending: boolean };
  /** Beside the chips, one line. */
  note?: ReactNode;
  /** Shown where there is no row at all: says what to do next. */
  empty: { title: string; text?: ReactNode; action?: ReactNode };
  /** Client pages: rows can be selected; gets the keys. */
  selected?: ReadonlySet<string>;
  onSelected?: (keys: ReadonlySet<string>) => void;
}

/** A dense table with sorting, chips, search, column choice, keyboard and CSV; its state stands in the address. */
export function DataTable(props: DataTableProps) {
  const { columns, chips = [], empty } = props;
  const [state, change] = useTableState(props.urlName);
  const [wantsCsv, setWantsCsv] = useState(false);
  const printWaits = usePrintWaits();
  const sort = state.sort ?? props.sort;
  const needsAll = wantsCsv || state.sort !== undefined || state.chip !== undefined || state.text !== "";
  const needed = needsAll ? Number.POSITIVE_INFINITY : printWaits ? PRINTED_MAX : 0;
  const loaded = useRows(props.rows, props.endpoint, needed, props.toRow);
  const shown = useMemo(() => shownColumns(columns, state), [columns, state]);
  const chip = chips.find(({ id }) => id === state.chip);
  const table = useTable(loaded.rows, columns, sort, chip, state.text);
  const visible = table.getRowModel().rows;
  const enough = loaded.complete || loaded.error !== null || loaded.rows.length >= needed;
  useTellPrint(enough);

  const rows = visible.map((row) => row.original);
  const filter = filterWords(chip, state.text);

  if (wantsCsv && loaded.complete) {
    setWantsCsv(false);
    queueMicrotask(() => saveCsv(props.name.replaceAll(" ", "-"), csvOf(columns, rows)));
  }
  const counts = useMemo(
    () => (loaded.complete ? countsOf(chips, loaded.rows) : undefined),
    [loaded.complete, loaded.rows, chips],
  );
  if (loaded.complete && loaded.rows.length === 0) {
    return (
      <EmptyState title={empty.title} action={empty.action}>
        {empty.text}
      </EmptyState>
    );
  }

  return (
    <div className="min-w-0">
      <TableBar
        name={props.name}
        chips={chips}
        counts={counts}
        chip={state.chip}
        onChip={(id) => change({ chip: id })}
        text={state.text}
        onText={(text) => change({ text })}
        columns={columns}
        shown={new Set(shown.map(({ key }) => key))}
        onShown={(keys) => change({ columns: keys })}
        onCsv={() => setWantsCsv(true)}
        onPrint={visible.length > virtualFrom || !loaded.complete ? orderPrint : undefined}
        note={props.note}
        status={statusOf(visible.length, loaded, props.total)}
      />
      {loaded.error ? <RowsFailed error={loaded.error} onRetry={loaded.retry} /> : null}
      <PrintedNote
        rows={rows}
        total={loaded.complete ? visible.length : filter === undefined ? (props.total ?? null) : null}
        filter={filter}
      >
        {props.note}
      </PrintedNote>
      <TableGrid
        name={props.name}
        columns={shown}
        rows={rows}
        keyOf={(row) => String(valueAt(row, props.rowKey ?? columns[0]?.key ?? "id"))}
        rowHref={props.rowHref}
        onOpen={props.onOpen}
        opened={props.opened}
        sort={sort}
        onSort={(key) => change({ sort: nextSort(sort, key) })}
        onEnd={loaded.loadMore}
        selected={props.selected}
        onSelected={props.onSelected}
      />
      {visible.length === 0 && loaded.complete ? (
        <p className="py-6 text-center text-ink-soft">
          No row passes.{" "}
          <Button onClick={() => change({ chip: undefined, text: "" })}>
            Show all {formatCount(loaded.rows.length)}
          </Button>
        </p>
      ) : null}
    </div>
  );
}

function useTable(
  rows: readonly Row[],
  columns: readonly DataColumn[],
  sort: TableState["sort"],
  chip: FilterChip | undefined,
  text: string,
): Table<Row> {
  const definitions = useMemo<ColumnDef<Row>[]>(
    () =>
      columns.map((column) => ({
        id: column.key,
        // Only undefined is sorted last whichever the direction.
        accessorFn: (row) => valueAt(row, column.key) ?? undefined,
        sortUndefined: "last",
        sortingFn: compareRows,
      })),
    [columns],
  );
  const filter = useMemo(() => ({ chip, text: text.trim().toLowerCase() }), [chip, text]);
  const globalFilterFn = useCallback(
    (row: TableRow<Row>, _id: string, wanted: typeof filter) =>
      (!wanted.chip || passes(wanted.chip, row.original)) &&
      (!wanted.text || columns.some((column) => textOf(column, row.original).toLowerCase().includes(wanted.text))),
    [columns],
  );
  const { key, descending } = sort ?? {};
  const sorting = useMemo(() => (key === undefined ? [] : [{ id: key, desc: descending === true }]), [key, descending]);
  return useReactTable({
    data: rows as Row[],
    columns: definitions,
    // There are no pages to go back to; the reset would render anew, sort anew and so reset again, for ever.
    autoResetPageIndex: false,
    state: {
      sorting,
      globalFilter: filter.chip || filter.text ? filter : undefined,
    },
    globalFilterFn,
    getColumnCanGlobalFilter: () => true,
    getCoreRowModel: getCoreRowModel(),
    getSortedRowModel: getSortedRowModel(),
    getFilteredRowModel: getFilteredRowModel(),
  });
}

const collator = new Intl.Collator("en", { numeric: true });

function compareRows(a: TableRow<Row>, b: TableRow<Row>, key: string): number {
  const [left, right] = [a.getValue(key), b.getValue(key)];
  if (typeof left === "number" && typeof right === "number") return left - right;
  return collator.compare(String(left), String(right));
}

/** Rising, then falling, then as the page has it. */
function nextSort(sort: TableState["sort"], key: string): TableState["sort"] {
  if (sort?.key !== key) return { key, descending: false };
  return sort.descending ? undefined : { key, descending: true };
}

/** The first column is always shown: it names the row. */
function shownColumns(columns: readonly DataColumn[], state: TableState): DataColumn[] {
  const wanted = state.columns;
  return columns.filter((column, i) => i === 0 || (wanted ? wanted.includes(column.key) : !column.hidden));
}

function countsOf(chips: readonly FilterChip[], rows: readonly Row[]): ReadonlyMap<string, number> {
  const counts = new Map([["", rows.length]]);
  for (const chip of chips) counts.set(chip.id, rows.filter((row) => passes(chip, row)).length);
  return counts;
}

/** What the rows have to pass, in words. */
function filterWords(chip: FilterChip | undefined, text: string): string | undefined {
  const words = [chip?.name, text.trim()].filter(Boolean).map((word) => `“${word}”`);
  return words.length > 0 ? words.join(" and ") : undefined;
}

function statusOf(visible: number, loaded: LoadedRows, total: number | undefined): string {
  const all = formatCount(loaded.rows.length);
  const of = total === undefined ? all : `${all} of ${formatCount(total)}`;
  if (loaded.loading) return loaded.rows.length ? `${of} loaded, loading` : "loading";
  if (visible !== loaded.rows.length) return `${formatCount(visible)} of ${all}`;
  if (!loaded.complete) return `${of} loaded`;
  return loaded.rows.length === 1 ? "1 row" : `${all} rows`;
}
