"use client";

import { memo, type RefObject } from "react";
import { ToneShape } from "@/app/_components/state/state-mark";
import { CellInput } from "./cell-input";
import type { Column } from "./columns";
import type { RowDeeds, RowProblem, Writing } from "./part-table";

interface PartRowProps {
  row: number;
  /** JSON pointer of the field or checksum. */
  path: string;
  part: Record<string, unknown>;
  columns: readonly Column[];
  problems: readonly RowProblem[];
  /** Column of the table's focus, if it is in this row. */
  here: number | undefined;
  writing: Writing | undefined;
  lit: boolean;
  readOnly: boolean;
  deeds: RefObject<RowDeeds | null>;
}

/** One field or checksum: its members as cells, the first one its name. */
export const PartRow = memo(function PartRow(props: PartRowProps) {
  const { row, path, part, columns, problems, here, writing, lit, readOnly, deeds } = props;
  return (
    <tr
      aria-selected={here !== undefined}
      onMouseEnter={() => deeds.current?.point(path)}
      className={`border-b border-rule/55 last:border-0 ${lit ? "bg-tint" : ""}`}
    >
      {columns.map((column, index) => {
        const active = here === index;
        const isWriting = writing?.column === index;
        const text = column.kind.read(part);
        const Cell = index === 0 ? "th" : "td";
        return (
          <Cell
            key={column.name}
            role={index === 0 ? "rowheader" : "gridcell"}
            data-cell={active ? "here" : undefined}
            data-member={column.name}
            tabIndex={active && !isWriting ? 0 : -1}
            aria-readonly={readOnly || text === null || undefined}
            title={text === null ? "Written in the text only" : undefined}
            onFocus={() => {
              deeds.current?.go({ row, column: index });
              deeds.current?.point(path);
            }}
            onClick={() => deeds.current?.go({ row, column: index })}
            onDoubleClick={() => deeds.current?.begin({ row, column: index })}
            className={`h-8 px-2 text-left font-mono font-normal focus-visible:-outline-offset-2 ${column.figures ? "text-right" : ""} ${
              index === 0 ? `sticky left-0 ${lit ? "bg-tint" : "bg-raised"}` : ""
            }`}
          >
            {isWriting ? (
              <CellInput
                column={column}
                writing={writing}
                onCommit={(entry, step = 0) => deeds.current?.commit(entry, { row, column: index + step })}
                onCancel={() => deeds.current?.cancel()}
              />
            ) : (
              <>
                {index === 0 ? <RowMark problems={problems} /> : null}
                {text === null ? (column.kind.tell?.(part) ?? "…") : column.figures ? text.replace("-", "−") : text}
              </>
            )}
          </Cell>
        );
      })}
    </tr>
  );
});

/** What stands against the row, as a shape with its words. */
function RowMark({ problems }: { problems: readonly RowProblem[] }) {
  if (problems.length === 0) return null;
  const words = problems.map((problem) => problem.message).join("; ");
  const bad = problems.some((problem) => problem.stands);
  return (
    <span title={words} className={`mr-1.5 inline-block align-baseline ${bad ? "text-oxide" : "text-ochre"}`}>
      <ToneShape tone={bad ? "bad" : "caution"} size={10} />
      <span className="sr-only">{words} — </span>
    </span>
  );
}
