"use client";

import { Columns3, Download, Printer, Search } from "lucide-react";
import { DropdownMenu } from "radix-ui";
import type { ReactNode } from "react";
import type { DataColumn, FilterChip } from "@/app/_components/table/column";
import { PRINTED_MAX } from "@/app/_components/table/printed-rows";
import { formatCount } from "@/lib/domain/format/figure";

const chipLook =
  "inline-flex h-[27px] items-center gap-1.5 rounded border bg-raised px-[9px] text-sm whitespace-nowrap";
const chipOff = "border-rule text-ink-soft hover:border-ink-faint";

export interface TableBarProps {
  name: string;
  chips: readonly FilterChip[];
  /** Rows of each chip by id and of all under "", once everything is known. */
  counts?: ReadonlyMap<string, number>;
  chip: string | undefined;
  onChip: (id: string | undefined) => void;
  text: string;
  onText: (text: string) => void;
  columns: readonly DataColumn[];
  shown: ReadonlySet<string>;
  onShown: (keys: string[]) => void;
  onCsv: () => void;
  /** Beside CSV: another form of the same rows. */
  onJson?: () => void;
  /** Long tables only: loads what a print takes and prints the page. */
  onPrint?: () => void;
  note?: ReactNode;
  status?: string;
}

/** Over a table: chips, what is searched, which columns, CSV. */
export function TableBar(props: TableBarProps) {
  const { chips, chip, onChip, counts } = props;
  return (
    <div className="mb-2 flex flex-wrap items-center gap-2 print:hidden">
      {chips.length ? (
        <fieldset className="m-0 flex flex-wrap gap-2">
          <legend className="sr-only">Rows of {props.name}</legend>
          <Chip on={chip === undefined} onClick={() => onChip(undefined)} name="All" count={counts?.get("")} />
          {chips.map(({ id, name }) => (
            <Chip key={id} on={chip === id} onClick={() => onChip(id)} name={name} count={counts?.get(id)} />
          ))}
        </fieldset>
      ) : null}
      <div className="relative">
        <Search size={14} aria-hidden className="absolute top-[6.5px] left-2 text-ink-soft" />
        <input
          type="search"
          aria-label={`Find in ${props.name}`}
          placeholder="Find in the rows"
          value={props.text}
          onChange={(event) => props.onText(event.currentTarget.value)}
          className="h-[27px] w-40 rounded border border-rule bg-paper pr-2 pl-7 text-sm"
        />
      </div>
      {props.note ? <div className="min-w-0 text-sm text-ink-soft">{props.note}</div> : null}
      <div className="ml-auto flex flex-wrap items-center justify-end gap-2">
        <span role="status" className="text-xs whitespace-nowrap text-ink-soft">
          {props.status}
        </span>
        <ColumnChoice {...props} />
        <button type="button" onClick={props.onCsv} className={`${chipLook} ${chipOff}`}>
          <Download size={14} aria-hidden />
          CSV
        </button>
        {props.onJson ? (
          <button type="button" onClick={props.onJson} className={`${chipLook} ${chipOff}`}>
            <Download size={14} aria-hidden />
            JSON
          </button>
        ) : null}
        {props.onPrint ? (
          <button
            type="button"
            onClick={props.onPrint}
            title={`Loads the first ${formatCount(PRINTED_MAX)} rows and prints the page`}
            className={`${chipLook} ${chipOff}`}
          >
            <Printer size={14} aria-hidden />
            Print
          </button>
        ) : null}
      </div>
    </div>
  );
}

function Chip({ on, onClick, name, count }: { on: boolean; onClick: () => void; name: string; count?: number }) {
  const look = on ? "border-copper font-semibold text-copper-strong" : chipOff;
  return (
    <button type="button" aria-pressed={on} onClick={onClick} className={`${chipLook} ${look}`}>
      {name}
      {count === undefined ? null : ` ${formatCount(count)}`}
    </button>
  );
}

function ColumnChoice({ columns, shown, onShown }: TableBarProps) {
  const toggle = (key: string, on: boolean) =>
    onShown(columns.map((column) => column.key).filter((other) => (other === key ? on : shown.has(other))));
  return (
    <DropdownMenu.Root>
      <DropdownMenu.Trigger className={`${chipLook} ${chipOff}`}>
        <Columns3 size={14} aria-hidden />
        Columns
      </DropdownMenu.Trigger>
      <DropdownMenu.Portal>
        <DropdownMenu.Content
          align="end"
          sideOffset={4}
          collisionPadding={12}
          className="z-40 max-h-(--radix-dropdown-menu-content-available-height) overflow-y-auto rounded border border-rule bg-raised p-1.5 shadow-(--overlay-shadow)"
        >
          {columns.slice(1).map((column) => (
            <DropdownMenu.CheckboxItem
              key={column.key}
              checked={shown.has(column.key)}
              onCheckedChange={(on) => toggle(column.key, on)}
              onSelect={(event) => event.preventDefault()}
              className="flex cursor-pointer items-center gap-2 rounded px-2 py-1 text-sm outline-none data-highlighted:bg-tint"
            >
              <span
                aria-hidden="true"
                className="flex size-4 items-center justify-center rounded border border-ink-faint"
              >
                <DropdownMenu.ItemIndicator>
                  <span className="block size-2 bg-copper" />
                </DropdownMenu.ItemIndicator>
              </span>
              {column.header}
            </DropdownMenu.CheckboxItem>
          ))}
        </DropdownMenu.Content>
      </DropdownMenu.Portal>
    </DropdownMenu.Root>
  );
}
