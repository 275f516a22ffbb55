import type { Reading } from "@/lib/domain/compensation/types";
import type { Column } from "./columns";
import { readDecimal, readLabel, readSerial, readTime, readWhole } from "./read-cell";
import type { RowErrorList } from "./row-error-list";

/** What could be read of a row that is wrong. */
export interface PartialRow {
  serial?: string;
  point?: number;
}

interface CellRule {
  field: Exclude<keyof Reading, "row">;
  read: (text: string) => string | number | undefined;
  code: string;
  needs: string;
  optional?: boolean;
}

const decimal = (field: CellRule["field"], optional = false): CellRule => ({
  field,
  read: readDecimal,
  code: "reading.not_a_number",
  needs: "a decimal number such as -0.0139659",
  optional,
});

const label = (field: CellRule["field"]): CellRule => ({
  field,
  read: readLabel,
  code: "reading.text_invalid",
  needs: "at most 64 characters, starting with a letter or digit",
  optional: true,
});

const RULES: Record<Column, CellRule> = {
  serial: {
    field: "serial",
    read: readSerial,
    code: "reading.serial_invalid",
    needs: "1 to 32 of A–Z, 0–9, dot, hyphen and underscore, starting with a letter or digit",
  },
  point: { field: "point", read: readWhole, code: "reading.point_invalid", needs: "an integer of at most nine digits" },
  chamber_c: decimal("chamberC"),
  soak_min: decimal("soakMin"),
  device_temp: decimal("deviceTemp"),
  load_kg: decimal("loadKg"),
  signal_mv_v: decimal("signalMvV"),
  taken_at: {
    field: "takenAt",
    read: readTime,
    code: "reading.time_invalid",
    needs: "a time with its offset (RFC 3339), such as 2026-03-02T09:48:00Z",
  },
  position: label("position"),
  hardware_id: label("hardwareId"),
  dwell_s: decimal("dwellS", true),
  output_mv_v: decimal("outputMvV", true),
};

const CELL_SHOWN_MAX = 40;
const TIMES_REMEMBERED = 5_000;

/** What a cell held, for a message: shortened, without control characters. */
export function shownCell(text: string): string {
  const clean = text.slice(0, CELL_SHOWN_MAX + 1).replace(/\p{C}/gu, "�");
  return clean.length > CELL_SHOWN_MAX ? `${clean.slice(0, CELL_SHOWN_MAX)}…` : clean;
}

/** How the cells of some columns become a reading. */
export type RowRules = readonly (CellRule & { column: Column })[];

export function rulesFor(columns: readonly Column[]): RowRules {
  return columns.map((column) => {
    const rule = RULES[column];
    return { ...rule, column, read: column === "taken_at" ? remembered(rule.read) : rule.read };
  });
}

/** Devices of one chamber share their times: a text met before needs no reading. */
function remembered(read: CellRule["read"]): CellRule["read"] {
  const met = new Map<string, ReturnType<CellRule["read"]>>();
  return (text) => {
    const before = met.get(text);
    if (before !== undefined) return before;
    const value = read(text);
    if (met.size < TIMES_REMEMBERED) met.set(text, value);
    return value;
  };
}

type Values = Record<Exclude<CellRule["field"], "position" | "hardwareId" | "dwellS" | "outputMvV">, unknown> &
  Partial<Record<CellRule["field"], unknown>> & { row: number };

/** Of one shape from the start, which is what makes a million of them quick to make and to read. */
function blank(row: number): Values {
  return {
    row,
    serial: undefined,
    point: undefined,
    chamberC: undefined,
    soakMin: undefined,
    deviceTemp: undefined,
    loadKg: undefined,
    signalMvV: undefined,
    takenAt: undefined,
  };
}

/**
 * One row as a reading; every cell that is wrong is named.
 * @param line of the file, the header being 1.
 */
export function readRow(
  cells: readonly string[],
  rules: RowRules,
  line: number,
  errors: RowErrorList,
): { reading: Reading } | { partial: PartialRow } {
  if (cells.length !== rules.length) {
    const message = `The row has ${cells.length} cells, the header ${rules.length}.`;
    errors.add({ row: line, column: "", code: "row.cells_wrong", message });
    return { partial: {} };
  }
  const values = blank(line);
  let wrong = false;
  for (let index = 0; index < rules.length; index++) {
    const rule = rules[index] as RowRules[number];
    const text = (cells[index] as string).trim();
    const value = text === "" && rule.optional ? null : rule.read(text);
    values[rule.field] = value;
    if (value !== undefined) continue;
    wrong = true;
    const found = text === "" ? "the cell is empty" : `found "${shownCell(text)}"`;
    errors.add({ row: line, column: rule.column, code: rule.code, message: `Takes ${rule.needs}; ${found}.` });
  }
  if (!wrong) return { reading: values as unknown as Reading };
  const { serial, point } = values;
  return {
    partial: { ...(typeof serial === "string" && { serial }), ...(typeof point === "number" && { point }) },
  };
}
