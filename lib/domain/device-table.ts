import type { GivenDevice } from "@/lib/domain/batches";

/** Serials and batches: 1 to 32 of A–Z, 0–9, dot, hyphen and underscore, a letter or digit first. */
const CODE = /^[A-Z0-9][A-Z0-9._-]{0,31}$/;
const FIELDS = ["serial", "gaugeBatch", "materialBatch"] as const;
type Field = (typeof FIELDS)[number];
const FIELD_OF: Record<string, Field> = {
  serial: "serial",
  gauge_batch: "gaugeBatch",
  material_batch: "materialBatch",
};

export interface ReadDevices {
  devices: Required<GivenDevice>[];
  /** What can't be taken, with its line from 1. */
  refused: { line: number; text: string; why: string }[];
}

/**
 * Devices with their batches from lines `serial,gauge_batch,material_batch`, parted by commas, semicolons or tabs. A first line
 * of these names may order the columns otherwise; an empty batch means that nobody knows.
 */
export function readDeviceTable(text: string): ReadDevices {
  const found: ReadDevices = { devices: [], refused: [] };
  const seen = new Map<string, number>();
  let columns: readonly (Field | undefined)[] = FIELDS;
  text.split(/\r\n|\r|\n/).forEach((lineText, index) => {
    const line = index + 1;
    const cells = lineText.split(/[,;\t]/).map((cell) => cell.trim().replace(/^"(.*)"$/, "$1"));
    if (cells.every((cell) => cell === "")) return;
    const header = headerOf(cells);
    if (header && found.devices.length === 0 && found.refused.length === 0) columns = header;
    else readLine(cells, columns, { line, text: lineText }, seen, found);
  });
  return found;
}

/** The columns that a line names; undefined where it is no header. */
function headerOf(cells: readonly string[]): (Field | undefined)[] | undefined {
  const fields = cells.map((cell) => FIELD_OF[cell.toLowerCase().replace(/[ -]+/g, "_")]);
  return fields.includes("serial") ? fields : undefined;
}

function readLine(
  cells: readonly string[],
  columns: readonly (Field | undefined)[],
  at: { line: number; text: string },
  seen: Map<string, number>,
  found: ReadDevices,
): void {
  const device: Required<GivenDevice> = { serial: "", gaugeBatch: null, materialBatch: null };
  const refuse = (why: string) => found.refused.push({ ...at, why });
  if (cells.slice(columns.length).some((cell) => cell !== "")) return void refuse("has more cells than columns");
  for (const [place, field] of columns.entries()) {
    const code = (cells[place] ?? "").toUpperCase();
    if (!field || (code === "" && field !== "serial")) continue;
    if (!CODE.test(code)) return void refuse(field === "serial" ? "has no serial" : "has a batch that is no code");
    device[field] = code;
  }
  const earlier = seen.get(device.serial);
  if (earlier !== undefined) return void refuse(`names ${device.serial} again, as line ${earlier}`);
  seen.set(device.serial, at.line);
  found.devices.push(device);
}
