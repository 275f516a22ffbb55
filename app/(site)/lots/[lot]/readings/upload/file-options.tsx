"use client";

import { Checkbox } from "@/app/_components/form/checkbox";
import { Select } from "@/app/_components/form/select";
import { TextInput } from "@/app/_components/form/text-input";
import type { Delimiter } from "@/lib/domain/readings/delimited-text";
import type { Encoding } from "@/lib/domain/readings/encoding";
import type { TableFacts, TableOptions } from "./worker-messages";

const ENCODING_NAMES: { value: Encoding; name: string }[] = [
  { value: "utf-8", name: "UTF-8" },
  { value: "utf-16le", name: "UTF-16, little-endian" },
  { value: "utf-16be", name: "UTF-16, big-endian" },
  { value: "windows-1252", name: "Windows-1252 (Western European)" },
];

const DELIMITER_NAMES: { value: Delimiter; name: string }[] = [
  { value: ",", name: "Comma" },
  { value: ";", name: "Semicolon" },
  { value: "\t", name: "Tab" },
];

export interface FileOptionsProps {
  facts: TableFacts;
  decimalComma: boolean;
  offset: string;
  offsetWrong: boolean;
  disabled: boolean;
  onReread: (options: TableOptions) => void;
  onChange: (values: { decimalComma?: boolean; offset?: string }) => void;
}

/** How the file is written: what was found in it, to be changed where that is wrong. */
export function FileOptions({
  facts,
  disabled,
  decimalComma,
  offset,
  offsetWrong,
  onReread,
  onChange,
}: FileOptionsProps) {
  const { encoding, delimiter, sheet, sheets, headerRow } = facts;
  // What was chosen before stays as it is.
  const reread = (change: TableOptions) =>
    onReread({
      headerRow,
      ...(encoding && { encoding }),
      ...(delimiter && { delimiter }),
      ...(sheet !== null && { sheet }),
      ...change,
    });
  return (
    <div className="flex flex-col gap-3">
      <div className="grid gap-4 sm:grid-cols-2 lg:grid-cols-4">
        {encoding ? (
          <Select
            label="Encoding"
            options={ENCODING_NAMES}
            value={encoding}
            disabled={disabled}
            onChange={(event) => reread({ encoding: event.currentTarget.value as Encoding })}
          />
        ) : null}
        {delimiter ? (
          <Select
            label="Columns are separated by"
            options={DELIMITER_NAMES}
            value={delimiter}
            disabled={disabled}
            onChange={(event) => reread({ delimiter: event.currentTarget.value as Delimiter })}
          />
        ) : null}
        {sheets.length > 0 ? (
          <Select
            label="Sheet"
            options={sheets.map((name) => ({ value: name, name }))}
            value={sheet ?? ""}
            disabled={disabled}
            onChange={(event) => onReread({ sheet: event.currentTarget.value })}
          />
        ) : null}
        <TextInput
          label="Offset of times"
          value={offset}
          disabled={disabled}
          onChange={(event) => onChange({ offset: event.currentTarget.value.trim() })}
          placeholder="+01:00"
          help="For times that name none. Leave empty where each time names its own."
          error={offsetWrong ? "Takes Z or an offset such as +01:00." : undefined}
        />
      </div>
      <div className="flex flex-wrap gap-x-8 gap-y-1.5">
        <Checkbox
          label="The first row names the columns"
          checked={headerRow}
          disabled={disabled}
          onChange={(event) => reread({ headerRow: event.currentTarget.checked })}
        />
        <Checkbox
          label="Numbers have a decimal comma"
          checked={decimalComma}
          disabled={disabled}
          onChange={(event) => onChange({ decimalComma: event.currentTarget.checked })}
        />
      </div>
    </div>
  );
}
