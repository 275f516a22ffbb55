/** Printing in a browser, on a real `npm start` with its demo: long tables are whole on paper, or paper says what is missing. */
import type { Page } from "playwright-core";
import { beforeAll, describe, expect, it } from "vitest";
import { visitDemo } from "@/tests/support/demo-visit";
import type { Visitor } from "@/tests/support/visitor";

/** Width of A4 within margins of 14 mm, in CSS pixels. */
const UPRIGHT_PX = Math.floor(((210 - 28) / 25.4) * 96);
const LOT = "MW20-2601";

let engineer: Visitor;
let page: Page;

beforeAll(async () => {
  ({ engineer } = (await visitDemo(["engineer"])).visitors);
  page = engineer.page;
  // The dialog itself is the browser's; that it was asked for is enough.
  await page.addInitScript(() => {
    window.print = () => document.documentElement.setAttribute("data-asked", "");
  });
});

/** Opens the derivation of the demo's largest lot, 2,000 devices of which 500 are loaded. */
async function openDerivation(): Promise<void> {
  await page.goto(`/lots/${LOT}`);
  const id = await page.evaluate(async (lot) => {
    const answer = await fetch(`/api/v1/lots/${lot}/derivations`);
    return ((await answer.json()) as { items: { id: string }[] }).items[0]?.id;
  }, LOT);
  await page.goto(`/derivations/${id}`);
  await page.getByRole("link", { name: `${LOT}-00001`, exact: true }).waitFor();
}

interface Paper {
  rows: number;
  lines: string[];
  /** How far anything reaches beyond the sheet. */
  over: number;
}

/** What stands on paper, as the browser lays it out. */
async function onPaper(): Promise<Paper> {
  const before = page.viewportSize();
  await page.setViewportSize({ width: UPRIGHT_PX, height: 900 });
  await page.emulateMedia({ media: "print" });
  // A print waits for the page by itself; this way of showing one does not.
  await page.locator("table[aria-label=devices] tbody tr:visible").first().waitFor();
  const paper = await page.evaluate(() => {
    const shown = (element: Element) => element.getClientRects().length > 0;
    const card = [...document.querySelectorAll("section")].find(
      (one) => one.querySelector("h2")?.textContent === "Devices",
    );
    return {
      rows: [...(card?.querySelectorAll("tbody tr") ?? [])].filter(shown).length,
      lines: [...(card?.querySelectorAll("p") ?? [])].filter(shown).map((line) => line.textContent ?? ""),
      over: document.documentElement.scrollWidth - window.innerWidth,
    };
  });
  await page.emulateMedia({ media: "screen" });
  if (before) await page.setViewportSize(before);
  return paper;
}

/** What a reader would miss if it moved. */
const screen = () =>
  page.evaluate(() => ({
    page: window.scrollY,
    table: document.querySelector("table[aria-label=devices]")?.parentElement?.scrollTop,
    focus: document.activeElement?.getAttribute("data-row"),
    rows: document.querySelectorAll("table[aria-label=devices] tbody tr").length,
  }));

describe("a table of 2,000 devices on paper", () => {
  it("is all that is loaded, and says how much that is", async () => {
    await openDerivation();
    const { rows, lines, over } = await onPaper();
    expect(rows).toBe(500);
    expect(lines).toContain("Rows 1 to 500 of 2,000: export the table for all");
    expect(over).toBe(0);
  });

  it("is whole once the page's own button was used, and says nothing then", async () => {
    await openDerivation();
    await page.getByRole("button", { name: "Print", exact: true }).first().click();
    await page.locator("html[data-asked]").waitFor();
    const { rows, lines } = await onPaper();
    expect(rows).toBe(2_000);
    expect(lines.filter((line) => line.includes("export the table"))).toEqual([]);
  });

  it("names the filter that rows had to pass", async () => {
    await openDerivation();
    await page.getByRole("button", { name: /^Verification/ }).click();
    await page.getByRole("status").getByText("60 of 2,000").waitFor();
    const { rows, lines } = await onPaper();
    expect(rows).toBe(60);
    expect(lines).toContain("Only rows that pass “Verification”. 60 of them.");
  });

  it("leaves the screen as it was: places and focus", async () => {
    await openDerivation();
    await page.locator("table[aria-label=devices] tr[data-row='0']").focus();
    for (let at = 0; at < 4; at++) await page.keyboard.press("PageDown");
    await page.locator("tr[data-row='60']:focus").waitFor();
    const before = await screen();
    expect(before).toMatchObject({ focus: "60" });
    expect(before.table).toBeGreaterThan(0);
    const sheets = await page.pdf({ format: "A4" });
    expect(sheets.length).toBeGreaterThan(50_000);
    expect(await screen()).toEqual(before);
    expect(engineer.errors).toEqual([]);
  });
});
