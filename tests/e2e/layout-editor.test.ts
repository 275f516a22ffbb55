/**
 * The layout editor in a browser, on a real `npm start` with its demo: from an empty draft to a published layout by keyboard
 * alone, and two people on one draft who lose nothing.
 */
import type { Page } from "playwright-core";
import { beforeAll, describe, expect, it } from "vitest";
import { DEMO_PASSWORD, visitDemo } from "@/tests/support/demo-visit";
import type { Visitor } from "@/tests/support/visitor";

const LAYOUTS = "/families/MW-20/layouts";
const people = ["engineer", "engineer2", "reviewer"] as const;

let origin: string;
/** Pages on which Tab leaves the text. */
const tabLeaves = new WeakSet<Page>();
let visitors: Record<(typeof people)[number], Visitor>;
const page = (who: (typeof people)[number]) => visitors[who].page;

beforeAll(async () => {
  ({ origin, visitors } = await visitDemo(people));
  for (const name of people) page(name).on("load", (loaded) => tabLeaves.delete(loaded));
});

/** What has the focus: its name, and whether Tab would stay inside the text. */
function focused(of: Page): Promise<{ name: string; inText: boolean }> {
  return of.evaluate(() => {
    const active = document.activeElement;
    const label = active?.id ? document.querySelector(`label[for="${CSS.escape(active.id)}"]`)?.textContent : undefined;
    const name = active?.getAttribute("aria-label") ?? label ?? active?.textContent ?? "";
    return { name: name.trim(), inText: active?.closest(".monaco-editor") != null };
  });
}

/** Presses Tab until something of that name has the focus. @throws Error where Tab never gets there. */
async function tabTo(of: Page, name: RegExp): Promise<void> {
  for (let presses = 0; presses < 250; presses++) {
    const now = await focused(of);
    if (name.test(now.name)) return;
    if (now.inText && !tabLeaves.has(of)) {
      // The text keeps Tab to itself until it is told otherwise, once a loaded page; the page says so under it.
      await of.keyboard.press("Control+M");
      tabLeaves.add(of);
    }
    await of.keyboard.press("Tab");
  }
  throw new Error(`Tab never comes to ${name}`);
}

/** Comes to a button by Tab and presses Enter. */
async function press(of: Page, name: RegExp): Promise<void> {
  await tabTo(of, name);
  await of.keyboard.press("Enter");
}

const finding = (of: Page, text: string | RegExp) => of.getByRole("listitem").filter({ hasText: text }).first();
const saved = (of: Page) =>
  of
    .getByText(/saved (just now|\d+ s ago)/)
    .first()
    .waitFor();
const stored = async (version: string) =>
  (await page("engineer").request.get(`/api/v1${LAYOUTS}/${version}`)).json() as Promise<Record<string, never>>;

describe("a layout by keyboard alone", () => {
  it("begins empty and is filled by mends and in the table", async () => {
    const engineer = page("engineer");
    await engineer.goto(`${LAYOUTS}/new`);
    await engineer.locator(".monaco-editor .view-line").first().waitFor();
    await tabTo(engineer, /^Shape$/);
    await engineer.keyboard.press("End");
    await press(engineer, /^Take this shape$/);
    await finding(engineer, "No field holds coefficients.tempOffset").waitFor();
    for (const name of ["tempOffset", "tempSlope", "zero", "zeroTc", "gain", "gainTc"]) {
      await press(engineer, new RegExp(`^Add “${name}” at`));
      await finding(engineer, `No field holds coefficients.${name},`).waitFor({ state: "detached" });
    }
    await press(engineer, /^Make it 2\.0\.0$/);
    await press(engineer, /^Add “imageCrc” at 62$/);
    await press(engineer, /^Add “serial” at/);
    await engineer.getByRole("heading", { name: /^No errors/ }).waitFor();
  });

  it("writes cells, and undoes them in one history with the text", async () => {
    const engineer = page("engineer");
    const grid = engineer.getByRole("grid", { name: "Fields" });
    const serial = grid.getByRole("rowheader", { name: "serial", exact: true });
    await serial.waitFor();
    await tabTo(engineer, /^serial$/);
    await engineer.keyboard.press("Enter");
    await engineer.keyboard.press("Control+A");
    await engineer.keyboard.type("serialNumber");
    await engineer.keyboard.press("Enter");
    const renamed = grid.getByRole("rowheader", { name: "serialNumber" });
    await renamed.waitFor();
    await engineer.keyboard.press("Control+z");
    await serial.waitFor();
    await engineer.keyboard.press("Control+y");
    await renamed.waitFor();
    // Down to the first coefficient, along to its upper limit.
    await engineer.keyboard.press("ArrowDown");
    await engineer.keyboard.press("End");
    await engineer.keyboard.press("ArrowLeft");
    await engineer.keyboard.type("500");
    await engineer.keyboard.press("Enter");
    await grid.getByRole("gridcell", { name: "500", exact: true }).waitFor();
  });

  it("is added as a draft, typed in and saved by itself", async () => {
    const engineer = page("engineer");
    await press(engineer, /^Add as a draft$/);
    await engineer.waitForURL(`**${LAYOUTS}/2.0.0`);
    await engineer.locator(".monaco-editor .view-line").first().waitFor();
    await tabTo(engineer, /^Layout 2\.0\.0 of MW-20, JSON/);
    await engineer.keyboard.press("Control+Home");
    for (let line = 0; line < 4; line++) await engineer.keyboard.press("ArrowDown");
    await engineer.keyboard.press("End");
    await engineer.keyboard.press("ArrowLeft");
    await engineer.keyboard.press("ArrowLeft");
    await engineer.keyboard.press("Backspace");
    await engineer.keyboard.type("9");
    await saved(engineer);
    expect(await stored("2.0.0")).toMatchObject({ firmware: ">=1.0.0 <2.0.9", unfinished: false });
    const { document } = (await stored("2.0.0")) as unknown as {
      document: { fields: { name: string; max?: number }[] };
    };
    expect(document.fields.slice(0, 2)).toMatchObject([{ name: "serialNumber" }, { name: "tempOffset", max: 500 }]);
  });

  it("is published by a second person", async () => {
    await press(page("engineer"), /^Ask for publishing$/);
    await page("engineer").getByText("in review").first().waitFor();
    const reviewer = page("reviewer");
    await reviewer.goto(`${LAYOUTS}/2.0.0`);
    await reviewer.locator(".monaco-editor .view-line").first().waitFor();
    await press(reviewer, /^What changes/);
    await tabTo(reviewer, /^Your password/);
    await reviewer.keyboard.type(DEMO_PASSWORD);
    await press(reviewer, /^Publish /);
    await reviewer
      .getByText(/^Published /)
      .first()
      .waitFor();
    expect((await stored("2.0.0")).state).toBe("published");
  });
});

describe("two people on one draft", () => {
  const version = "2.1.0";
  /** Opens the cell of a field's member and writes it. */
  const write = async (of: Page, field: string, member: string, entry: string) => {
    const row = of.getByRole("row").filter({ has: of.getByRole("rowheader", { name: field, exact: true }) });
    await row.locator(`[data-member="${member}"]`).dblclick();
    await of.keyboard.press("Control+A");
    await of.keyboard.type(entry);
    await of.keyboard.press("Enter");
  };

  it("lose nothing: the second is asked, and puts the two together", async () => {
    const [one, two] = [page("engineer"), page("engineer2")];
    const { source } = (await stored("2.0.0")) as unknown as { source: string };
    const draft = source.replace('"version": "2.0.0"', `"version": "${version}"`);
    const made = await one.request.post(`/api/v1${LAYOUTS}`, {
      headers: { "content-type": "application/json", origin },
      data: Buffer.from(draft),
    });
    expect(made.status()).toBe(201);
    for (const of of [one, two]) {
      await of.goto(`${LAYOUTS}/${version}`);
      await of.locator(".monaco-editor .view-line").first().waitFor();
    }
    await write(one, "gain", "max", "1.25");
    await saved(one);
    await write(two, "zero", "min", "-0.5");
    const dialog = two.getByRole("dialog", { name: "Two people wrote this draft" });
    await dialog.getByText("only they changed it").waitFor();
    await dialog.getByRole("button", { name: "Put together with 1 place of theirs" }).click();
    await dialog.waitFor({ state: "detached" });
    await saved(two);
    const { document } = (await stored(version)) as unknown as {
      document: { fields: { name: string; min?: number; max?: number }[] };
    };
    expect(document.fields.find((field) => field.name === "gain")?.max).toBe(1.25);
    expect(document.fields.find((field) => field.name === "zero")?.min).toBe(-0.5);
  });

  it("are told of the other's save before they save themselves", async () => {
    const one = page("engineer");
    // Coming back to the window asks at once; it is asked every 20 seconds anyway.
    await one.evaluate(() => window.dispatchEvent(new Event("focus")));
    const notice = one.getByRole("note").filter({ hasText: "saved another text of this draft" });
    await notice.waitFor();
    expect(await one.getByRole("button", { name: "Ask for publishing" }).isDisabled()).toBe(true);
    await notice.getByRole("button", { name: "Look at both" }).click();
    const dialog = one.getByRole("dialog", { name: "Two people wrote this draft" });
    await dialog.getByText("only they changed it").waitFor();
    await dialog.getByRole("button", { name: "Take theirs" }).click();
    await notice.waitFor({ state: "detached" });
    await one.getByText(/^draft \d+ by/).waitFor();
    const before = (await stored(version)) as unknown as { draft: number };
    await one.waitForTimeout(2_000);
    expect(await stored(version)).toMatchObject({ draft: before.draft });
  });

  it("keep what was typed without a connection, and send it when the line is back", async () => {
    const two = page("engineer2");
    await visitors.engineer2.context.setOffline(true);
    await write(two, "zero", "max", "0.5");
    await two
      .getByText(/kept in this browser/)
      .first()
      .waitFor();
    await visitors.engineer2.context.setOffline(false);
    await saved(two);
    const { document } = (await stored(version)) as unknown as {
      document: { fields: { name: string; max?: number }[] };
    };
    expect(document.fields.find((field) => field.name === "zero")?.max).toBe(0.5);
  });

  it("raised no error in any browser and talked to no other host", () => {
    // What a refused or lost call says on the page, the browser says in its console too.
    const told = (text: string) => !/net::ERR_INTERNET_DISCONNECTED|status of 409/.test(text);
    for (const name of people) expect({ [name]: visitors[name].errors.filter(told) }).toEqual({ [name]: [] });
  });
});
