"use client";

import { useEffect, useState } from "react";
import { Checkbox } from "@/app/_components/form/checkbox";
import { Select } from "@/app/_components/form/select";
import { TextInput } from "@/app/_components/form/text-input";
import { ScrollRegion } from "@/app/_components/scroll-region";
import { formatCount } from "@/lib/domain/format/figure";
import { REQUIRED_COLUMNS } from "@/lib/domain/readings/columns";
import {
  ALL_COLUMNS,
  type ColumnMap,
  type GivenTable,
  mapTable,
  missingColumns,
  suggestMap,
} from "@/lib/domain/readings/map-table";

const SHOWN_ROWS = 5;
const OFFSET = /^(Z|[+-]\d{2}:\d{2})$/;

/** Which column of a foreign table is which of ours, with the first rows as they would be uploaded. */
export function ColumnMapping({ table, onMapped }: { table: GivenTable; onMapped: (csv: string | undefined) => void }) {
  const [map, setMap] = useState<ColumnMap>(() => suggestMap(table.headers));
  const [decimalComma, setDecimalComma] = useState(() =>
    table.rows.some((row) => row.some((cell) => /^\s*-?\d+,\d+\s*$/.test(cell))),
  );
  const [offset, setOffset] = useState("");
  useEffect(() => setMap(suggestMap(table.headers)), [table]);
  const missing = missingColumns(map);
  const offsetWrong = offset !== "" && !OFFSET.test(offset);
  useEffect(() => {
    const complete = missing.length === 0 && !offsetWrong;
    onMapped(complete ? mapTable(table, map, { decimalComma, offset }) : undefined);
  }, [table, map, decimalComma, offset, missing.length, offsetWrong, onMapped]);

  const preview = mapTable({ ...table, rows: table.rows.slice(0, SHOWN_ROWS) }, map, {
    decimalComma,
    offset: offsetWrong ? "" : offset,
  });
  return (
    <fieldset className="m-0 min-w-0 rounded border border-rule p-4">
      <legend className="px-1 font-semibold">Columns of this file</legend>
      <p className="mb-3 text-sm text-ink-soft">
        {formatCount(table.rows.length)} rows. The mapped table is what is uploaded, kept and digested; keep the
        original too.
      </p>
      <div className="grid gap-3 sm:grid-cols-2 lg:grid-cols-4">
        {ALL_COLUMNS.map((column) => (
          <Select
            key={column}
            label={<span className="font-mono">{column}</span>}
            placeholder={(REQUIRED_COLUMNS as readonly string[]).includes(column) ? "Choose" : "Not in the file"}
            value={map[column] === undefined ? "" : String(map[column])}
            onChange={(event) => {
              const { value } = event.currentTarget;
              setMap({ ...map, [column]: value === "" ? undefined : Number(value) });
            }}
            options={table.headers.map((name, index) => ({
              value: String(index),
              name: name || `column ${index + 1}`,
            }))}
          />
        ))}
      </div>
      <div className="mt-3 grid gap-3 sm:grid-cols-2">
        <Checkbox
          label="Numbers have a decimal comma"
          checked={decimalComma}
          onChange={(event) => setDecimalComma(event.currentTarget.checked)}
        />
        <TextInput
          label="Offset of times that name none"
          code
          value={offset}
          onChange={(event) => setOffset(event.currentTarget.value)}
          help="Z for UTC, or as +01:00; leave it empty where every time names its own."
          error={offsetWrong ? "Takes Z or an offset such as +01:00." : undefined}
        />
      </div>
      <p className="mt-3 text-sm" role="status">
        {missing.length > 0 ? (
          <span className="font-medium text-ochre">Still to choose: {missing.join(", ")}.</span>
        ) : (
          "All columns are found. The first rows as they are uploaded:"
        )}
      </p>
      <ScrollRegion label="First rows" className="mt-1 max-h-40 overflow-auto bg-sunk p-2">
        <pre className="font-mono text-xs">{preview}</pre>
      </ScrollRegion>
    </fieldset>
  );
}
