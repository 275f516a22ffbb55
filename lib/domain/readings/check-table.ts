import type { RowError } from "@/lib/domain/compensation/run-checks";
import type { FamilyRules, Finding, Purpose } from "@/lib/domain/compensation/types";
import { type Column, isColumn } from "./columns";
import { ReadingsGatherer } from "./gather-readings";
import type { GivenRow } from "./given-table";
import { judgeReadings } from "./judge-readings";
import { type ColumnMap, csvLine, type MapOptions, mappedColumns, mapRow, refusedKind } from "./map-table";
import { RowErrorList } from "./row-error-list";

const LINES_A_PIECE = 5_000;

export interface CheckedTable {
  rows: number;
  devices: number;
  /** What is wrong, by line of the given file; at most 200 of `errorCount`. */
  errors: RowError[];
  errorCount: number;
  /** None where there are errors. */
  findings: Finding[];
}

/** Holds a given table's rows against what the server will hold them against, and writes the CSV that it is sent. */
export class TableCheck {
  /** The readings CSV, in pieces. */
  readonly csv: string[] = [];
  /** Line in the given file of every row of the CSV. */
  readonly lines: number[] = [];
  private readonly columns: Column[];
  private readonly gatherer = new ReadingsGatherer();
  private pending: string[] = [];

  constructor(
    private readonly map: ColumnMap,
    private readonly options: MapOptions,
  ) {
    this.columns = mappedColumns(map);
    this.gatherer.take(this.columns, 1);
    this.pending.push(this.columns.join(","));
  }

  /** Takes the next row of the table, not its header. @throws AppError `run.too_many_rows` */
  take(row: GivenRow): void {
    const cells = mapRow(row, this.map, this.columns, this.options);
    this.lines.push(row.line);
    this.pending.push(csvLine(cells));
    if (this.pending.length >= LINES_A_PIECE) this.flush();
    if (this.refusesKinds(row)) this.gatherer.skip();
    else this.gatherer.take(cells, row.line);
  }

  /** The whole table's errors, or its findings. */
  done(rules: FamilyRules, purpose: Purpose): CheckedTable {
    this.flush();
    const parsed = this.gatherer.done();
    const errors = new RowErrorList();
    const judged = judgeReadings(rules, purpose, parsed, errors);
    const devices = new Set(parsed.readings.map((reading) => reading.serial)).size;
    return { rows: this.lines.length, devices, errors: errors.list(), ...judged };
  }

  private flush(): void {
    if (this.pending.length > 0) this.csv.push(`${this.pending.join("\n")}\n`);
    this.pending = [];
  }

  private refusesKinds({ kinds, line }: GivenRow): boolean {
    if (!kinds) return false;
    let refused = false;
    for (const column of this.columns) {
      const why = refusedKind(column, kinds[this.map[column] as number]);
      if (why) this.gatherer.errors.add({ row: line, column, ...why });
      refused ||= why !== undefined;
    }
    return refused;
  }
}

/** Whether a text file is a readings CSV as it stands, so that its very bytes can be sent. */
export function isReadingsCsv(
  given: { names: readonly string[]; headerRow: boolean; encoding: string | null; delimiter: string | null },
  map: ColumnMap,
  options: MapOptions,
): boolean {
  if (!given.headerRow || given.encoding !== "utf-8" || given.delimiter !== ",") return false;
  if (options.decimalComma || options.offset !== "") return false;
  return given.names.every((name, place) => {
    const column = name.trim().toLowerCase();
    return isColumn(column) && map[column] === place;
  });
}
