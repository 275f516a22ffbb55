"use client";

import { type KeyboardEvent, useId, useRef } from "react";
import type { Column } from "./columns";
import type { Writing } from "./part-table";

interface CellInputProps {
  column: Column;
  writing: Writing;
  /** @param step how many columns to go on. */
  onCommit: (entry: string, step?: number) => void;
  onCancel: () => void;
}

/** The open cell: a choice where there are only some values, else a line of text. Enter and Tab take it, Escape does not. */
export function CellInput({ column, writing, onCommit, onCancel }: CellInputProps) {
  const id = useId();
  const done = useRef(false);
  const finish = (entry: string, step = 0) => {
    done.current = true;
    onCommit(entry, step);
    // Refused: the cell stays open and may be left again.
    setTimeout(() => {
      done.current = false;
    });
  };
  const press = (event: KeyboardEvent<HTMLInputElement | HTMLSelectElement>) => {
    event.stopPropagation();
    if (event.key === "Escape") {
      done.current = true;
      onCancel();
    } else if (event.key === "Enter" || event.key === "Tab") {
      event.preventDefault();
      finish(event.currentTarget.value, event.key === "Tab" ? (event.shiftKey ? -1 : 1) : 0);
    }
  };
  const shared = {
    "aria-label": column.header,
    "aria-invalid": writing.refusal ? (true as const) : undefined,
    autoFocus: true,
    onKeyDown: press,
    className:
      "w-full min-w-[9ch] rounded border border-copper bg-paper px-1 font-mono text-ink aria-invalid:border-oxide",
  };
  if (column.choices) {
    const known = column.choices.includes(writing.entry) ? writing.entry : (startingWith(column, writing.entry) ?? "");
    return (
      <select {...shared} defaultValue={known} onBlur={(event) => done.current || finish(event.currentTarget.value)}>
        {column.choices.map((choice) => (
          <option key={choice} value={choice}>
            {choice || "—"}
          </option>
        ))}
      </select>
    );
  }
  return (
    <>
      <input
        {...shared}
        type="text"
        size={Math.max(8, writing.entry.length + 2)}
        defaultValue={writing.entry}
        list={column.suggestions ? `${id}-list` : undefined}
        onBlur={(event) => done.current || finish(event.currentTarget.value)}
      />
      {column.suggestions ? (
        <datalist id={`${id}-list`}>
          {column.suggestions.map((suggestion) => (
            <option key={suggestion} value={suggestion} />
          ))}
        </datalist>
      ) : null}
    </>
  );
}

/** The choice that a first letter means. */
const startingWith = ({ choices }: Column, letter: string) =>
  choices?.find((choice) => letter !== "" && choice.startsWith(letter));
