import { isRight, unitOf } from "@/app/_components/table/column";
import { roomBefore } from "@/app/_components/table/column-widths";
import type { TableGridProps } from "@/app/_components/table/table-grid";

const headLook =
  "sticky top-0 border-b border-rule bg-raised py-1.5 pr-3 text-xs font-semibold text-ink-soft whitespace-nowrap print:static print:py-[0.3em] print:pr-[0.8em] print:text-[0.95em] print:whitespace-normal";

/** The headings with their units; each sorts by its column. */
export function TableHead({ columns, rows, keyOf, sort, onSort, selected, onSelected }: TableGridProps) {
  const keys = selected ? rows.flatMap((row) => (row ? [keyOf(row)] : [])) : [];
  const all = keys.length > 0 && keys.every((key) => selected?.has(key));
  return (
    <thead>
      <tr>
        {selected ? (
          <th scope="col" className={`${headLook} z-10 pl-1.5 text-left print:hidden`}>
            <input
              type="checkbox"
              aria-label="Select all rows shown"
              checked={all}
              onChange={() => onSelected?.(all ? new Set() : new Set(keys))}
              className="size-4 accent-copper"
            />
          </th>
        ) : null}
        {columns.map((column, index) => {
          const unit = unitOf(column);
          const direction = sort?.key === column.key ? (sort.descending ? "descending" : "ascending") : undefined;
          const place = index === 0 ? "left-0 z-20 pl-1.5" : `z-10 ${roomBefore(columns, index)}`;
          return (
            <th
              key={column.key}
              scope="col"
              title={column.title}
              aria-sort={direction}
              className={`${headLook} ${place} ${isRight(column) ? "text-right" : "text-left"}`}
            >
              {column.sortable === false ? (
                column.header
              ) : (
                <>
                  <button
                    type="button"
                    onClick={() => onSort(column.key)}
                    className="font-semibold hover:text-ink print:hidden"
                  >
                    {column.header}
                    <Direction of={direction} />
                  </button>
                  {/* A browser repeats on each page only what is text. */}
                  <span className="hidden print:inline">
                    {column.header}
                    <Direction of={direction} />
                  </span>
                </>
              )}
              {unit ? <span className="block font-normal">{unit}</span> : null}
            </th>
          );
        })}
      </tr>
    </thead>
  );
}

function Direction({ of }: { of: "ascending" | "descending" | undefined }) {
  return (
    <span aria-hidden="true" className="text-copper">
      {of === "ascending" ? " ↑" : of === "descending" ? " ↓" : ""}
    </span>
  );
}
