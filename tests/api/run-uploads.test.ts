import { sql } from "kysely";
import { beforeAll, beforeEach, describe, expect, it } from "vitest";
import { FILE_MAX_BYTES } from "@/lib/domain/readings/parse-readings-csv";
import { openTestApi, type TestApi } from "../support/api";
import { makeWorkbook, textRow } from "../support/made-workbook";
import { PASSWORD } from "../support/people";
import { arrangeFamilyLot } from "../support/scenario/family-lot";

let api: TestApi;
let lot: string;
let before: string;

const HEADER = "serial,point,chamber_c,soak_min,device_temp,load_kg,signal_mv_v,taken_at";
const CELLS = ["NEW-1", "1", "10.5", "98", "1941.32", "0", "-0.0139659", "2026-03-02T09:48:00Z"];
const ROW = CELLS.join(",");
const MIB = 1024 * 1024;

const withCell = (index: number, cell: string) => CELLS.map((given, at) => (at === index ? cell : given)).join(",");
const withPosition = (cell: string) => `${HEADER},position\n${ROW},${cell}\n`;

beforeAll(async () => {
  api = await openTestApi();
  const people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  ({ lot } = await arrangeFamilyLot(people));
});
beforeEach(async () => {
  before = await countRows();
});

/** Rows of every table that an upload may write to. */
async function countRows(): Promise<string> {
  const tables = [
    "run",
    "run_file",
    "run_equipment",
    "run_finding",
    "reading",
    "device",
    "ledger_event",
    "ledger_text",
  ];
  const counts = tables.map((table) => sql`(select count(*) from ${sql.table(table)})`);
  const { rows } = await sql<{ counts: string }>`select concat_ws(' ', ${sql.join(counts)}) as counts`.execute(
    api.owner,
  );
  return rows[0]?.counts ?? "";
}

/** With `addDevices`, so that devices of a refused file would be seen too. */
const upload = (body: string | Buffer | Uint8Array | ReadableStream, headers: Record<string, string> = {}) =>
  api.call("POST", `/lots/${lot}/runs`, {
    as: "engineer",
    body,
    headers: { "content-type": "text/csv", ...headers },
    query: { purpose: "zero", addDevices: true },
  });

/** A stream of as many pieces as are asked for. */
function streamOf(piece: Uint8Array, pieces: number): { stream: ReadableStream<Uint8Array>; sent: () => number } {
  let sent = 0;
  const stream = new ReadableStream<Uint8Array>({
    pull: (controller) => {
      if (sent >= pieces) return controller.close();
      sent++;
      controller.enqueue(piece);
    },
  });
  return { stream, sent: () => sent };
}

describe("a hostile file is refused with what is wrong in it, and leaves no trace", () => {
  it.each([
    [
      "invalid UTF-8",
      Buffer.concat([Buffer.from(`${HEADER}\n${ROW}\n`), Buffer.from([0xc3, 0x28])]),
      "3  file.not_utf8",
    ],
    ["Windows-1252", Buffer.from(withPosition("größer"), "latin1"), "2  file.not_utf8"],
    ["UTF-16 with its mark", Buffer.from(`\uFEFF${HEADER}\n${ROW}\n`, "utf16le"), "1  file.not_utf8"],
    ["UTF-16 without one", Buffer.from(`${HEADER}\n${ROW}\n`, "utf16le").swap16(), "1  file.not_utf8"],
    ["semicolons and decimal commas", `${HEADER}\n${ROW}\n`.replaceAll(",", ";"), "1  file.separator"],
    ["a million columns", `${"serial,".repeat(1_000_000)}\n${ROW}\n`, "1  file.line_too_long"],
    ["a million columns in a row", `${HEADER}\n${"1,".repeat(1_000_000)}\n`, "2  file.line_too_long"],
    ["NaN", `${HEADER}\n${withCell(2, "NaN")}\n`, "2 chamber_c reading.not_a_number"],
    ["1e999", `${HEADER}\n${withCell(6, "1e999")}\n`, "2 signal_mv_v reading.not_a_number"],
    ["Infinity", `${HEADER}\n${withCell(6, "-Infinity")}\n`, "2 signal_mv_v reading.not_a_number"],
    ["a hexadecimal number", `${HEADER}\n${withCell(4, "0x7F")}\n`, "2 device_temp reading.not_a_number"],
    ["a formula for a serial", `${HEADER}\n${withCell(0, "=1+1")}\n`, "2 serial reading.serial_invalid"],
    ["a formula for a place, =", withPosition('"=HYPERLINK(""http://x.example"")"'), "2 position reading.text_invalid"],
    ["a formula for a place, +", withPosition("+cmd|x"), "2 position reading.text_invalid"],
    ["a formula for a place, @", withPosition("@SUM(A1)"), "2 position reading.text_invalid"],
    ["a formula for a number", `${HEADER}\n${withCell(5, "=0")}\n`, "2 load_kg reading.not_a_number"],
    ["markup for a serial", `${HEADER}\n${withCell(0, "<img src=x>")}\n`, "2 serial reading.serial_invalid"],
    ["signs that turn the writing direction", withPosition("A\u202E1"), "2 position reading.text_invalid"],
    ["control characters", withPosition("A\u00071"), "2 position reading.text_invalid"],
    ["a NUL byte", `${HEADER}\n${withCell(0, "NEW\u00001")}\n`, "1  file.not_utf8"],
    ["a quotation mark never closed", `${HEADER}\n${ROW}\n"${ROW}\n`, "3  file.quotes_wrong"],
    ["an end in the middle of a row", `${HEADER}\n${ROW}\n${ROW.slice(0, 30)}`, "3  row.cells_wrong"],
    ["the same column twice", `${HEADER},point\n${ROW},1\n`, "1 point column.repeated"],
    ["a cell of a megabyte", `${HEADER}\n${withCell(0, "A".repeat(MIB))}\n`, "2  file.line_too_long"],
    ["a cell of 60 kB", `${HEADER}\n${withCell(0, "A".repeat(60_000))}\n`, "2 serial reading.serial_invalid"],
  ])("%s", async (_, body, expected) => {
    const reply = await upload(body);
    expect([reply.status, reply.body.code]).toEqual([422, "run.invalid"]);
    const { row, column, code, message } = reply.body.errors[0];
    expect(`${row} ${column} ${code}`).toBe(expected);
    expect(message.length).toBeLessThan(300);
    expect(message).not.toMatch(/[\p{Cc}\p{Cf}]/u);
    expect(await countRows()).toBe(before);
  });

  it("a workbook sent as it is", async () => {
    const reply = await upload(await makeWorkbook({ sheet: textRow(1, HEADER.split(",")) }));
    expect(reply.body.errors[0]).toMatchObject({
      row: 1,
      code: "file.not_csv",
      message: expect.stringContaining("XLSX"),
    });
    expect(await countRows()).toBe(before);
  });

  it("a million rows", async () => {
    const reply = await upload(`${HEADER}\n${"A,1,1,1,1,0,0,2026-03-02T09:48:00Z\n".repeat(1_000_000)}`);
    expect([reply.status, reply.body.code, reply.body.rowsMax]).toEqual([413, "run.too_many_rows", 600_000]);
    expect(await countRows()).toBe(before);
  }, 120_000);

  it("one row of 64 MiB", async () => {
    const body = Buffer.alloc(FILE_MAX_BYTES, "A");
    body.write(`${HEADER}\n`);
    const reply = await upload(body);
    expect(reply.body.errors).toMatchObject([{ row: 2, code: "file.line_too_long" }]);
    expect(await countRows()).toBe(before);
  }, 60_000);

  it("200 MB that say so, before a byte is read", async () => {
    const { stream, sent } = streamOf(new Uint8Array(MIB).fill(0x41), 200);
    const reply = await upload(stream, { "content-length": String(200 * MIB) });
    expect([reply.status, reply.body.code]).toEqual([413, "request.too_large"]);
    expect(sent()).toBeLessThan(3);
    expect(await countRows()).toBe(before);
  });

  it("200 MB that do not say so, as soon as they pass the bound", async () => {
    const { stream, sent } = streamOf(new Uint8Array(MIB).fill(0x41), 200);
    const reply = await upload(stream);
    expect([reply.status, reply.body.code]).toEqual([413, "request.too_large"]);
    expect(sent()).toBeLessThan(68);
    expect(await countRows()).toBe(before);
  });

  it("one cut short on its way", async () => {
    const reply = await upload(`${HEADER}\n${ROW}\n`, { "content-length": "5000" });
    expect([reply.status, reply.body.code, reply.body.announced]).toEqual([400, "request.cut_short", 5000]);
    expect(await countRows()).toBe(before);
  });
});

describe("an upload", () => {
  it("whose cells hold markup is stored as text, to be shown as text", async () => {
    const reply = await upload(withPosition("A1 <b>bold</b>"));
    expect(reply.status, JSON.stringify(reply.body)).toBe(201);
    const readings = await api.call("GET", `/runs/${reply.body.id}/readings`, { as: "auditor" });
    expect(readings.body.items[0].position).toBe("A1 <b>bold</b>");
  });

  it("made from another file keeps that file's digest", async () => {
    const sourceSha256 = "ab".repeat(32);
    const run = (query: object, body: string) =>
      api.call("POST", `/lots/${lot}/runs`, {
        as: "engineer",
        body,
        headers: { "content-type": "text/csv" },
        query: { purpose: "zero", addDevices: true, ...query },
      });
    const reply = await run({ sourceSha256 }, `${HEADER}\n${withCell(0, "NEW-2")}\n`);
    expect(reply.body.sourceSha256).toBe(sourceSha256);
    const plain = await run({}, `${HEADER}\n${withCell(0, "NEW-3")}\n`);
    expect(plain.body.sourceSha256).toBeNull();
    expect((await run({ sourceSha256: "AB" }, `${HEADER}\n`)).status).toBe(422);
  });
});
