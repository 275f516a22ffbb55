"use client";

import { useMemo } from "react";
import { Button } from "@/app/_components/button";
import { type ComparedField, changeMarks, rowOfChange } from "@/app/_components/difference/changed-device";
import { comparedFields } from "@/app/_components/difference/compared-fields";
import { differenceColumns } from "@/app/_components/difference/difference-columns";
import {
  DifferenceFilter,
  type DifferenceFilterState,
  useDifferenceFilter,
  useSettled,
} from "@/app/_components/difference/difference-filter";
import { serialsOf, useComparison } from "@/app/_components/difference/use-comparison";
import { EmptyState } from "@/app/_components/empty-state";
import { orderPrint, usePrintWaits, useTellPrint } from "@/app/_components/print/use-print-order";
import type { FilterChip, Row } from "@/app/_components/table/column";
import { PrintedNote } from "@/app/_components/table/printed-note";
import { PRINTED_MAX } from "@/app/_components/table/printed-rows";
import { RowsFailed } from "@/app/_components/table/rows-failed";
import { TableBar } from "@/app/_components/table/table-bar";
import { TableGrid, virtualFrom } from "@/app/_components/table/table-grid";
import { type TableState, useTableState } from "@/app/_components/table/use-table-state";
import { useWindows, type WindowedRows } from "@/app/_components/table/use-windows";
import { formatCount } from "@/lib/domain/format/figure";
import type { ChangeCounts, ComparisonOverview } from "@/schemas/api/compare";
import type { LayoutDocument } from "@/schemas/documents/layout";

export interface DifferenceTableProps {
  /** Ids of the older and the newer package. */
  from: string;
  to: string;
  /** Layout of the newer one. */
  layout: LayoutDocument;
  /** Serial whose bytes are shown beside the table. */
  opened?: string;
  onOpen: (row: Row) => void;
}

const CHIPS: readonly FilterChip[] = (["values", "version-only", "added", "removed"] as const).map((change) => ({
  id: change,
  name: { values: "Other values", "version-only": "Version only", added: "Added", removed: "Removed" }[change],
  key: "change",
  in: [change],
}));

const LARGEST = { key: "largest", descending: true };

/** Every serial that differs between two packages, with each value old → new; any number of them, any order. */
export function DifferenceTable({ from, to, layout, opened, onOpen }: DifferenceTableProps) {
  const { data: overview } = useComparison(from, to);
  const [state, change] = useTableState("changes");
  const [filter, changeFilter] = useDifferenceFilter();
  const fields = useMemo(() => fieldsOf(overview, layout), [overview, layout]);
  const columns = useMemo(() => differenceColumns(fields), [fields]);
  const toRow = useMemo(() => rowMaker(fields), [fields]);
  const settled = { text: useSettled(state.text), least: useSettled(filter.least) };
  const selection = queryOf({ ...state, text: settled.text }, { ...filter, least: settled.least });
  const known = selection === "" ? totalOf(overview?.counts) : null;
  const query = `from=${from}&to=${to}${selection}`;
  const printWaits = usePrintWaits();
  const loaded = useWindows(serialsOf(from, to) + selection, known, toRow, printWaits ? PRINTED_MAX : 0);
  const enough = loaded.error !== null || (loaded.total !== null && isLoaded(loaded.rows));
  useTellPrint(enough);
  // The field that is asked for is seen, whatever is shown beside it.
  const asked = (key: string) => ["shown", "step", "steps"].some((part) => key === `values.${filter.field}.${part}`);
  const shown = columns.filter(
    ({ key, hidden }, i) => i === 0 || asked(key) || (state.columns?.includes(key) ?? !hidden),
  );
  const save = (format: "csv" | "json") => window.location.assign(`/api/v1/compare/export?${query}&format=${format}`);
  if (loaded.total === 0 && selection === "") {
    return <EmptyState title="No serial differs">Both hold the same bytes for the same serials.</EmptyState>;
  }
  return (
    <div className="min-w-0">
      <TableBar
        name="changed serials"
        chips={CHIPS}
        counts={countsOf(overview?.counts)}
        chip={state.chip}
        onChip={(id) => change({ chip: id })}
        text={state.text}
        onText={(text) => change({ text })}
        columns={columns}
        shown={new Set(shown.map(({ key }) => key))}
        onShown={(keys) => change({ columns: keys })}
        onCsv={() => save("csv")}
        onJson={() => save("json")}
        onPrint={loaded.rows.length > virtualFrom ? orderPrint : undefined}
        note={
          <DifferenceFilter
            {...filter}
            fields={fields.filter((field) => field.changed).map((field) => field.name)}
            measure={measureOf(overview, filter.field)}
            onChange={changeFilter}
            largestFirst={state.sort?.key === LARGEST.key}
            onLargestFirst={(on) => change({ sort: on ? LARGEST : undefined })}
          />
        }
        status={statusOf(loaded)}
      />
      {loaded.error ? <RowsFailed error={loaded.error} onRetry={loaded.retry} /> : null}
      <PrintedNote
        rows={loaded.rows}
        total={loaded.total}
        filter={filterWords(state, filter, measureOf(overview, filter.field))}
      />
      <TableGrid
        key={query}
        name="changed serials"
        columns={shown}
        rows={loaded.rows}
        keyOf={(row) => String(row.serial)}
        onOpen={onOpen}
        opened={opened}
        sort={state.sort}
        onSort={(key) => change({ sort: nextSort(state.sort, key) })}
        onSight={loaded.onSight}
      />
      {loaded.total === 0 ? (
        <p className="py-6 text-center text-ink-soft">
          No serial passes.{" "}
          <Button
            onClick={() => {
              change({ chip: undefined, text: "" });
              changeFilter({ field: "", least: "" });
            }}
          >
            Show all
          </Button>
        </p>
      ) : null}
    </div>
  );
}

type ShownField = ComparedField & { changed: boolean };

/** Fields with columns: the changed ones first once they are known, until then all of the layout. */
function fieldsOf(overview: ComparisonOverview | undefined, layout: LayoutDocument): ShownField[] {
  const changed = new Set(overview?.fields.map((field) => field.name));
  return comparedFields(overview?.fields ?? [], layout).map((field) => ({
    ...field,
    changed: changed.has(field.name),
  }));
}

function rowMaker(fields: readonly ComparedField[]): (item: Row) => Row {
  const least = new Map(
    fields.flatMap((field) => (field.least === undefined ? [] : [[field.name, field.least] as const])),
  );
  return (item) => rowOfChange(item, least);
}

/** What is asked of the server beside the two packages; empty where nothing is filtered or ordered. */
function queryOf({ sort, chip, text }: TableState, { field, least }: DifferenceFilterState): string {
  const query = new URLSearchParams();
  const key = sort?.key.split(".")[1] ?? sort?.key;
  if (sort && key) query.set("sort", (sort.descending ? "-" : "") + key);
  if (chip && chip in changeMarks) query.set("change", chip);
  if (text.trim()) query.set("search", text.trim().slice(0, 32));
  if (field) query.set("field", field);
  const number = Number(least.replace(",", "."));
  if (field && number > 0 && Number.isFinite(number)) query.set("least", String(number));
  return query.size > 0 ? `&${query}` : "";
}

function totalOf(counts: ChangeCounts | undefined): number | null {
  return counts ? counts.values + counts["version-only"] + counts.added + counts.removed : null;
}

function countsOf(counts: ChangeCounts | undefined): ReadonlyMap<string, number> | undefined {
  if (!counts) return undefined;
  return new Map([
    ["", totalOf(counts) ?? 0],
    ...CHIPS.map(({ id }) => [id, counts[id as keyof ChangeCounts]] as const),
  ]);
}

function measureOf(overview: ComparisonOverview | undefined, name: string): string {
  const field = overview?.fields.find((one) => one.name === name);
  return field === undefined || field.histogram?.in === "steps" ? "steps" : (field.unit ?? "");
}

/** Rising, then falling, then by serial. */
function nextSort(sort: TableState["sort"], key: string): TableState["sort"] {
  if (sort?.key !== key) return { key, descending: false };
  return sort.descending ? undefined : { key, descending: true };
}

/** Whether the rows that a print takes are there. */
function isLoaded(rows: WindowedRows["rows"]): boolean {
  // A place that is not loaded is a hole in the array, which `every` would leave out.
  return !Array.from(rows.slice(0, PRINTED_MAX)).includes(undefined);
}

/** What the rows have to pass, in words. */
function filterWords(state: TableState, { field, least }: DifferenceFilterState, measure: string): string | undefined {
  const chip = CHIPS.find(({ id }) => id === state.chip)?.name;
  const words = [
    chip,
    state.text.trim(),
    field && (least ? `${field} by ${least} ${measure} or more` : `${field} differs`),
  ];
  const said = words.filter(Boolean).map((word) => `“${word}”`);
  return said.length > 0 ? said.join(" and ") : undefined;
}

function statusOf({ total, rows, loading }: WindowedRows): string {
  if (total === null) return loading ? "loading" : `${formatCount(rows.length)} loaded, counting`;
  return total === 1 ? "1 serial" : `${formatCount(total)} serials`;
}
