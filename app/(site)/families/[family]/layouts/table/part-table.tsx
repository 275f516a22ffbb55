"use client";

import { type KeyboardEvent, useEffect, useMemo, useRef, useState } from "react";
import { Button } from "@/app/_components/button";
import type { Problem } from "@/lib/errors";
import type { Column } from "./columns";
import { deedOf, type GridDeed, type GridPlace, within } from "./grid-keys";
import { PartRow } from "./part-row";

export interface PartTableProps {
  /** What a row is, as "field". */
  noun: string;
  /** Fields or checksums as they stand in the text. */
  parts: readonly Record<string, unknown>[];
  /** JSON pointer of the list. */
  list: string;
  columns: readonly Column[];
  problems: readonly RowProblem[];
  readOnly: boolean;
  shown: string | undefined;
  onPoint: (path: string | undefined) => void;
  /** Writes a cell. @returns why not, in words. */
  onWrite: (index: number, column: Column, entry: string) => string | undefined;
  /** Puts a new row behind the one of that index. @returns its index */
  onAdd: (after: number) => number;
  onRemove: (index: number) => void;
  onMove: (from: number, to: number) => void;
  onUndo: () => void;
  onRedo: () => void;
}

/** A finding; `stands` where it stands against the layout, and not only asks for a look. */
export type RowProblem = Problem & { stands: boolean };

/** What a row's cells ask of the table. */
export interface RowDeeds {
  point: (path: string) => void;
  go: (place: GridPlace) => void;
  begin: (place: GridPlace) => void;
  commit: (entry: string, then?: GridPlace) => void;
  cancel: () => void;
}

const none: readonly RowProblem[] = [];

/** Findings by the row that they are about. */
function rowsOf(problems: readonly RowProblem[], list: string): Map<number, RowProblem[]> {
  const rows = new Map<number, RowProblem[]>();
  for (const problem of problems) {
    const row = problem.path.startsWith(`${list}/`) ? Number(problem.path.split("/")[2]) : Number.NaN;
    if (Number.isInteger(row)) rows.set(row, [...(rows.get(row) ?? []), problem]);
  }
  return rows;
}

/** A cell that is being written in. */
export interface Writing extends GridPlace {
  entry: string;
  refusal?: string | undefined;
}

/**
 * Fields or checksums as a grid, one stop of Tab: arrows go from cell to cell, Enter or typing writes, Escape leaves a cell as
 * it was. It writes into the same text as the editor beside it.
 */
export function PartTable(props: PartTableProps) {
  const { noun, parts, list, columns, problems, readOnly, shown, onPoint, onWrite, onAdd, onRemove, onMove } = props;
  const grid = useRef<HTMLTableElement>(null);
  const [at, setAt] = useState<GridPlace>({ row: 0, column: 0 });
  const [writing, setWriting] = useState<Writing>();
  const [wanted, setWanted] = useState(0);
  const size = { rows: parts.length, columns: columns.length };
  const here = within(at, size);

  // The focus follows the deed that asked for it, never a change of the text from elsewhere.
  useEffect(() => {
    if (wanted > 0) grid.current?.querySelector<HTMLElement>('[data-cell="here"]')?.focus();
  }, [wanted]);
  const go = (to: GridPlace) => {
    setAt(to);
    setWanted((count) => count + 1);
  };

  const begin = (place: GridPlace, entry?: string) => {
    const [part, column] = [parts[place.row], columns[place.column]];
    if (readOnly || !part || !column) return;
    const current = column.kind.read(part);
    if (current === null) return;
    setAt(place);
    setWriting({ ...place, entry: entry ?? current });
  };
  const commit = (entry: string, then: GridPlace = here) => {
    const column = columns[here.column];
    if (!column || !writing) return;
    const refusal =
      entry === column.kind.read(parts[here.row] ?? {}) ? undefined : onWrite(here.row, column, entry.trim());
    if (refusal !== undefined) return setWriting({ ...writing, entry, refusal });
    setWriting(undefined);
    go(within(then, size));
  };
  const cancel = () => {
    setWriting(undefined);
    go(here);
  };
  const moveRow = (by: number) => {
    const to = here.row + by;
    if (to < 0 || to >= parts.length) return;
    onMove(here.row, to);
    go({ ...here, row: to });
  };
  const clear = () => {
    const column = columns[here.column];
    const refusal = column && onWrite(here.row, column, "");
    if (refusal) setWriting({ ...here, entry: "", refusal });
  };
  const add = () => go({ row: onAdd(parts.length === 0 ? -1 : here.row), column: 0 });
  const remove = () => {
    onRemove(here.row);
    go({ ...here, row: Math.max(0, Math.min(here.row, parts.length - 2)) });
  };

  const act = (deed: GridDeed) => {
    if (deed.do === "go") return go(deed.to);
    if (readOnly) return;
    if (deed.do === "write") return begin(here, deed.entry);
    if (deed.do === "clear") return clear();
    if (deed.do === "move") return moveRow(deed.by);
    if (deed.do === "add") return add();
    if (deed.do === "remove") return remove();
    return deed.do === "undo" ? props.onUndo() : props.onRedo();
  };
  const press = (event: KeyboardEvent) => {
    const deed = writing ? undefined : deedOf(event, here, size);
    if (!deed) return;
    event.preventDefault();
    act(deed);
  };

  const byRow = useMemo(() => rowsOf(problems, list), [problems, list]);
  // Rows are drawn again when what they show changes, not when the deeds behind them are made anew.
  const deeds = useRef<RowDeeds>(null);
  deeds.current = { point: onPoint, go: setAt, begin, commit, cancel };

  return (
    <div>
      <div className="overflow-x-auto" tabIndex={-1}>
        <table
          ref={grid}
          // biome-ignore lint/a11y/noNoninteractiveElementToInteractiveRole: a grid of cells is a table that can be worked in
          role="grid"
          aria-label={`${noun[0]?.toUpperCase()}${noun.slice(1)}s`}
          aria-readonly={readOnly}
          onKeyDown={press}
          onMouseLeave={() => onPoint(undefined)}
          className="w-full text-sm whitespace-nowrap"
        >
          <thead>
            <tr className="border-b border-rule text-left">
              {columns.map((column) => (
                <th
                  key={column.name}
                  scope="col"
                  title={column.hint}
                  className={`px-2 py-1.5 font-semibold first:sticky first:left-0 first:bg-raised ${column.figures ? "text-right" : ""}`}
                >
                  {column.header}
                </th>
              ))}
            </tr>
          </thead>
          <tbody>
            {parts.map((part, row) => (
              <PartRow
                // biome-ignore lint/suspicious/noArrayIndexKey: two fields may have one name while they are written
                key={row}
                row={row}
                path={`${list}/${row}`}
                part={part}
                columns={columns}
                problems={byRow.get(row) ?? none}
                here={here.row === row ? here.column : undefined}
                writing={writing?.row === row ? writing : undefined}
                lit={shown === `${list}/${row}`}
                readOnly={readOnly}
                deeds={deeds}
              />
            ))}
          </tbody>
        </table>
      </div>
      {writing?.refusal ? (
        <p role="alert" className="mt-1 text-sm font-medium text-oxide">
          {writing.refusal} Escape leaves the cell as it was.
        </p>
      ) : null}
      {readOnly ? null : (
        <div className="mt-2 flex flex-wrap items-center gap-2">
          <Button onClick={add}>Add a {noun}</Button>
          <Button onClick={remove} disabled={parts.length === 0}>
            Take {String(parts[here.row]?.name ?? `the ${noun}`)} out
          </Button>
          <Button onClick={() => moveRow(-1)} disabled={here.row === 0}>
            Move up
          </Button>
          <Button onClick={() => moveRow(1)} disabled={here.row >= parts.length - 1}>
            Move down
          </Button>
        </div>
      )}
    </div>
  );
}
