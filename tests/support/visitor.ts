/** Headless Chromium as a person uses it: a profile a person, and every error of its pages kept for the test to look at. */
import { mkdtempSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { type BrowserContext, chromium, type Page } from "playwright-core";
import { afterAll } from "vitest";

const CHROMIUM = "/usr/bin/chromium";
/** Without these it talks to hosts of its maker at every start. */
const FLAGS = [
  "--no-sandbox",
  "--disable-gpu",
  "--disable-quic",
  "--no-first-run",
  "--disable-background-networking",
  "--disable-component-update",
  "--disable-sync",
];
const PATIENCE_MS = 45_000;

export interface Visitor {
  context: BrowserContext;
  page: Page;
  /** Script errors, refused policies and requests to other hosts, as they happened. */
  errors: string[];
}

const closers: (() => Promise<void>)[] = [];
afterAll(async () => {
  for (const close of closers.splice(0)) await close();
});

/** Opens a browser with an empty profile on the app. */
export async function openVisitor(origin: string): Promise<Visitor> {
  const profile = mkdtempSync(join(tmpdir(), "trimwright-browser-"));
  const context = await chromium.launchPersistentContext(profile, {
    executablePath: CHROMIUM,
    headless: true,
    args: FLAGS,
    baseURL: origin,
    viewport: { width: 1440, height: 900 },
    acceptDownloads: true,
  });
  closers.push(async () => {
    await context.close();
    rmSync(profile, { recursive: true, force: true });
  });
  const errors: string[] = [];
  context.on("weberror", (error) => errors.push(String(error.error())));
  context.on("console", (message) => {
    // A refusal that a page shows in words is also written to the console by the browser.
    if (message.type() === "error" && !/status of 4\d\d/.test(message.text())) errors.push(message.text());
  });
  context.on("request", (request) => {
    const { protocol, origin: host } = new URL(request.url());
    if (protocol.startsWith("http") && host !== origin) errors.push(`request to another host: ${request.url()}`);
  });
  const page = context.pages()[0] ?? (await context.newPage());
  page.setDefaultTimeout(PATIENCE_MS);
  return { context, page, errors };
}

/** Signs in on the sign-in page and arrives where the person was going. */
export async function signIn({ page }: Visitor, email: string, password: string): Promise<void> {
  await page.goto("/sign-in");
  await page.getByLabel("E-mail").fill(email);
  await page.getByLabel("Password", { exact: true }).fill(password);
  await page.getByRole("button", { name: "Sign in" }).click();
  await page.waitForURL((url) => !url.pathname.startsWith("/sign-in"));
}
