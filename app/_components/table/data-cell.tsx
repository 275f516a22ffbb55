import Link from "next/link";
import type { ReactNode } from "react";
import { StateMark } from "@/app/_components/state/state-mark";
import { stateOf } from "@/app/_components/state/state-of";
import { type DataColumn, hrefOf, type Row, textOf, valueAt } from "@/app/_components/table/column";
import { TimeText } from "@/app/_components/time-text";

/** Content of a cell. `href` makes it the row's own link. */
export function DataCell({ column, row, href }: { column: DataColumn; row: Row; href?: string }): ReactNode {
  if (column.cell) return column.cell(row);
  const format = column.format ?? { as: "text" };
  const value = valueAt(row, column.key);
  if (format.as === "state") return typeof value === "string" ? <StateMark {...stateOf(format.kind, value)} /> : null;
  if ((format.as === "time" || format.as === "date") && typeof value === "string") {
    return <TimeText at={value} date={format.as === "date"} />;
  }
  const text = textOf(column, row);
  const target = format.as === "link" ? hrefOf(format.href, row) : href;
  if (target && text) {
    return (
      <Link href={target} prefetch={false} className="no-underline hover:underline">
        {text}
      </Link>
    );
  }
  return format.as === "digest" && typeof value === "string" ? <span title={value}>{text}</span> : text;
}
