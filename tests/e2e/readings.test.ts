/**
 * Uploading readings and keeping certificates in a browser, on a real `npm start` with its demo: foreign tables, workbooks,
 * errors in place, a lot of 5,000 devices, and a chamber's places.
 */
import { readFileSync } from "node:fs";
import { join } from "node:path";
import type { Page } from "playwright-core";
import { beforeAll, describe, expect, it } from "vitest";
import { visitDemo } from "@/tests/support/demo-visit";
import type { Visitor } from "@/tests/support/visitor";
import { makeBigLot } from "../bench/big-lot";
import { makeWorkbook, textRow } from "../support/made-workbook";

const GOLDEN = join(import.meta.dirname, "../fixtures/golden/readings-sample.csv");
/** Names as a German reader's program writes them, by ours. */
const NAMES = {
  serial: "Prüfling",
  point: "Punkt",
  chamber_c: "Kammer °C",
  soak_min: "Haltezeit min",
  device_temp: "Eigene Temperatur",
  load_kg: "Last kg",
  signal_mv_v: "Ausgang",
  taken_at: "Zeit",
} as const;

let engineer: Visitor;
let page: Page;

beforeAll(async () => {
  ({ engineer } = (await visitDemo(["engineer"])).visitors);
  page = engineer.page;
});

/** Makes a lot without devices and opens its readings. */
async function openLot(code: string): Promise<void> {
  await page.goto("/lots/new");
  const status = await page.evaluate(async (lot) => {
    const body = JSON.stringify({ code: lot, family: "MW-20", firmware: "2.3.0" });
    const headers = { "content-type": "application/json" };
    return (await fetch("/api/v1/lots", { method: "POST", body, headers })).status;
  }, code);
  expect(status).toBe(201);
  await page.goto(`/lots/${code}/readings`);
}

const goldenRows = () =>
  readFileSync(GOLDEN, "utf8")
    .trim()
    .split("\n")
    .map((line) => line.split(","));

/** The golden sample as a foreign table: other names, semicolons, decimal commas, local times, Windows-1252. */
function foreignTable(prefix: string, change: (cells: string[], line: number) => string[] = (cells) => cells): Buffer {
  const [columns, ...rows] = goldenRows();
  const header = [...(columns as string[]).map((column) => NAMES[column as keyof typeof NAMES]), "Bemerkung"];
  const lines = rows.map((cells, index) => {
    const own = cells.map((cell) =>
      cell
        .replace("MW20-2609", prefix)
        .replace(".", ",")
        .replace(/T(.*)Z$/, " $1"),
    );
    return [...change(own, index + 2), "größer"];
  });
  return Buffer.from([header, ...lines].map((cells) => cells.join(";")).join("\r\n"), "latin1");
}

async function choose(name: string, buffer: Buffer | Uint8Array, purpose = "sample"): Promise<void> {
  await page.locator("input[type=file]").setInputFiles({ name, mimeType: "text/csv", buffer: Buffer.from(buffer) });
  await page.getByLabel("Purpose").selectOption(purpose);
}

async function mapColumns(): Promise<void> {
  for (const [column, name] of Object.entries(NAMES))
    await page.getByLabel(`What column ${name} is`).selectOption(column);
  await page.getByLabel("Offset of times").fill("+02:00");
}

const upload = () => page.getByRole("button", { name: "Upload the run" });
const preview = () => page.getByRole("region", { name: "Preview of the file" });

describe("uploading readings", () => {
  it("reads a foreign table, marks what is wrong in it, and sends nothing", async () => {
    await openLot("RD-1");
    const wrong: Record<number, [number, string]> = { 9: [2, "NaN"], 30: [0, "=A1+1"], 31: [6, "1e999"] };
    const change = (cells: string[], line: number) =>
      cells.map((cell, at) => (wrong[line]?.[0] === at ? wrong[line][1] : cell));
    await choose("march.csv", foreignTable("RD1", change));
    await page.getByText("Columns are missing").waitFor();
    expect(await page.getByLabel("Encoding").inputValue()).toBe("windows-1252");
    expect(await page.getByLabel("Columns are separated by").inputValue()).toBe(";");
    expect(await page.getByLabel("Numbers have a decimal comma").isChecked()).toBe(true);
    await mapColumns();
    await page.getByText("3 errors, marked below").waitFor();
    for (const text of ["reading.serial_invalid", "NaN", "=A1+1", "1e999"])
      await preview().getByText(text).first().waitFor();
    expect(await upload().isDisabled()).toBe(true);
    expect(await page.getByText("No readings yet").count()).toBe(1);
  });

  it("shows what the server refuses in the rows of the given file, then stores what it takes", async () => {
    await choose("march.csv", foreignTable("RD1"));
    await page.getByText("80 rows").waitFor();
    await mapColumns();
    await page.getByText("all rows can be sent: 10 devices").waitFor();
    await upload().click();
    await page.getByText("The server refused the run; nothing was stored").waitFor();
    await page.getByText("80 errors; the first 50 are marked below").waitFor();
    await preview().getByText("device.unknown").first().waitFor();
    await page.getByLabel("Add devices that the lot doesn't have yet").check();
    await upload().click();
    await page.getByText("80 readings of 10 devices, 10 devices added to the lot").waitFor();
    await page.getByRole("link", { name: "Open the run" }).click();
    await page.getByText("Made in the browser, by column mapping").waitFor();
  });

  it("remembers the columns for the family", async () => {
    await openLot("RD-2");
    await choose("april.csv", foreignTable("RD2"));
    await page.getByText("columns as accepted last for this family").waitFor();
    expect(await page.getByLabel("Offset of times").inputValue()).toBe("+02:00");
    await page.getByText("all rows can be sent: 10 devices").waitFor();
  });

  it("refuses numbers for serials and formulas of a workbook, and says why", async () => {
    const [columns, ...rows] = goldenRows();
    const cellOf = (cell: string, at: number, line: number) => {
      if (at === 0 && line !== 3) return `<c t="inlineStr"><is><t>${cell}</t></is></c>`;
      if (at === 6 && line === 4) return `<c><f>G2*2</f><v>${cell}</v></c>`;
      if (at === 7) return `<c><v>${Date.parse(cell) / 86_400_000 + 25_569}</v></c>`;
      return `<c><v>${at === 0 ? "4711" : cell}</v></c>`;
    };
    const lines = rows.map((cells, index) => {
      const inner = cells.map((cell, at) => cellOf(cell, at, index + 2)).join("");
      return `<row r="${index + 2}">${inner}</row>`;
    });
    const workbook = await makeWorkbook({ sheet: textRow(1, columns as string[]) + lines.join("") });
    await choose("march.xlsx", workbook);
    await page.getByLabel("Offset of times").fill("Z");
    await preview().getByText("cell.number_for_text").waitFor();
    await preview().getByText("cell.formula").waitFor();
    await preview().getByText("2026-03-02T09:48:00Z").first().waitFor();
    await choose("half.xlsx", workbook.subarray(0, 900));
    await page.getByText("it is damaged or cut short").waitFor();
    await choose("bomb.csv", Buffer.from(`${"a,".repeat(1_000_000)}\n`));
    await page.getByText("is longer than 65,536 characters").waitFor();
  });

  it("takes the runs of 5,000 devices with its progress shown, the page staying usable", async () => {
    await openLot("RD-3");
    for (const { purpose, bytes } of makeBigLot("RD-3", 5_000).runs) {
      await choose(`${purpose}.csv`, bytes, purpose);
      await page.getByLabel("Add devices that the lot doesn't have yet").check();
      await page.getByText(/all rows can be sent/).waitFor();
      await upload().click();
      if (purpose === "zero") await page.getByRole("progressbar").waitFor();
      await page.getByText("The run is stored").waitFor();
      await page.reload();
    }
    const runs = await page.evaluate(async () => (await (await fetch("/api/v1/lots/RD-3/runs")).json()).items);
    expect(runs.map((run: { devices: number; rows: number }) => [run.devices, run.rows])).toEqual([
      [5, 60],
      [4_985, 19_940],
      [4_985, 19_940],
      [10, 120],
    ]);
  });

  it("stops when told to, with nothing sent", async () => {
    const rows = Buffer.from(
      `${goldenRows()[0]?.join(",")}\n${"A-1,1,1,1,1,0,0,2026-03-02T09:48:00Z\n".repeat(500_000)}`,
    );
    await choose("large.csv", rows, "zero");
    await page.getByRole("button", { name: "Stop" }).click();
    await page.getByRole("progressbar").waitFor({ state: "detached" });
    expect(await upload().isDisabled()).toBe(true);
  });
});

describe("a piece of equipment", () => {
  it("gets its next certificate with a chamber's places, and shows what changed", async () => {
    await page.goto("/equipment/CH-2");
    await page.getByRole("button", { name: "New certificate" }).click();
    const dialog = page.getByRole("dialog");
    await dialog.getByRole("button", { name: "Add a place" }).click();
    await dialog.getByLabel("Place 5", { exact: true }).fill("A1");
    await dialog.getByLabel("Deviation of place 5 in K").fill("-0,07");
    await dialog.getByLabel("Uncertainty of place 5 in K").fill("0.1");
    await dialog.getByRole("button", { name: "Save certificate" }).click();
    await dialog.getByText("This place stands in the list already.").waitFor();
    await dialog.getByLabel("Place 5", { exact: true }).fill("C1");
    await dialog.getByLabel("Coverage factor k").fill("2.1");
    await dialog.getByRole("button", { name: "Save certificate" }).click();
    await dialog.waitFor({ state: "detached" });
    await page.getByText("Coverage factor 2 → 2.1").waitFor();
    await page.getByText("± 0.3 °C (k = 2.1)").first().waitFor();
    await page.getByText("C1 \u22120.07 ± 0.1 K").first().waitFor();
  });

  it("tells due dates by word, in the list and on its page", async () => {
    await page.goto("/equipment");
    for (const word of ["in date", "due soon", "past its date"])
      await page.getByText(word, { exact: true }).first().waitFor();
    await page.goto("/equipment/PT-08");
    await page.getByText("past its date", { exact: true }).waitFor();
    await page.getByRole("link", { name: "Devices it reached" }).click();
    await page.waitForURL("**/trace/impact?equipment=PT-08");
  });

  it("left no error in any page", () => {
    expect(engineer.errors).toEqual([]);
  });
});
