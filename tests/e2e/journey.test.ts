/**
 * The whole flow in a browser, on a real `npm start` with its demo: a family and a layout are written and published, a lot is
 * read, derived, approved, built, reviewed, released, pulled by a station, written, looked up and answered for.
 * The readings are those of the golden example, whose coefficients an independent program computed.
 */
import { readFileSync } from "node:fs";
import { join } from "node:path";
import { v7 as uuidv7 } from "uuid";
import { afterEach, beforeAll, beforeEach, describe, expect, it } from "vitest";
import { DEMO_PASSWORD, visitDemo } from "@/tests/support/demo-visit";
import { failingCommands, unpacked } from "@/tests/support/unpacked-bundle";
import type { Visitor } from "@/tests/support/visitor";

const GOLDEN = join(import.meta.dirname, "../fixtures/golden");
const FAMILY = "MW-22";
const LOT = "MW22-2609";
const DEVICES = 28;

const people = ["engineer", "reviewer", "admin", "operator", "service", "auditor"] as const;
type Person = (typeof people)[number];

let origin: string;
let visitors: Record<Person, Visitor>;
const page = (who: Person) => visitors[who].page;

/** What one step leaves for the next. */
const made = { derivation: "", package: "", key: "" };

beforeAll(async () => {
  ({ origin, visitors } = await visitDemo(people));
});

/** Signs the panel or dialog that asks for the password. */
async function confirm(who: Person, button: string | RegExp, reason?: string): Promise<void> {
  const dialog = page(who).getByRole("dialog");
  if (reason !== undefined) await dialog.getByLabel("Reason").fill(reason);
  await dialog.getByLabel("Your password").fill(DEMO_PASSWORD);
  await dialog.getByRole("button", { name: button }).click();
  await dialog.waitFor({ state: "detached" });
}

async function fillFamily(): Promise<void> {
  const form = page("engineer");
  const family = JSON.parse(readFileSync(join(GOLDEN, "family.json"), "utf8"));
  await form.goto("/families/new");
  await form.getByLabel("Code").fill(FAMILY);
  await form.getByLabel("Name", { exact: true }).fill("Bending beam 20 kg, second make");
  await form.getByLabel("Accuracy class").selectOption(family.accuracyClass);
  const labels: Record<string, string> = {
    capacityKg: "Rated capacity",
    nominalMvV: "Nominal output",
    referenceC: "Reference temperature",
    temperatureMinC: "Lowest temperature",
    temperatureMaxC: "Highest temperature",
    intervals: "Verification intervals n",
    vMinRatioY: "Ratio Y",
    pLc: "Fraction p_LC",
    minSoakMinutes: "Least soak",
    minLoadFraction: "Least load",
    minTemperatureSpanK: "Least span of temperatures",
    temperatureShare: "Share for temperature",
    coverage: "Coverage",
    confidence: "Confidence",
  };
  for (const [name, label] of Object.entries(labels)) await form.getByLabel(label).fill(String(family[name]));
  await form.getByRole("button", { name: "Add family as a draft" }).click();
  await form.waitForURL(`**/families/${FAMILY}`);
}

/** A reviewer opens what changes and publishes. */
async function publish(path: string): Promise<void> {
  const reviewer = page("reviewer");
  await reviewer.goto(path);
  await reviewer.getByText("What changes", { exact: true }).click();
  await reviewer.getByLabel("Your password").fill(DEMO_PASSWORD);
  await reviewer.getByRole("button", { name: /^Publish / }).click();
  await reviewer
    .getByText(/^Published /)
    .first()
    .waitFor();
}

async function uploadRun(purpose: string): Promise<void> {
  const engineer = page("engineer");
  await engineer.goto(`/lots/${LOT}/readings`);
  await engineer.locator("input[type=file]").setInputFiles(join(GOLDEN, `readings-${purpose}.csv`));
  await engineer.getByLabel("Purpose").selectOption(purpose);
  await engineer.getByLabel("Add devices that the lot doesn't have yet").check();
  await engineer.getByRole("button", { name: "Upload the run" }).click();
  await engineer.getByText("The run is stored").waitFor();
}

async function asStation(path: string, body?: unknown): Promise<Response> {
  return fetch(`${origin}/api/v1${path}`, {
    method: body === undefined ? "GET" : "POST",
    headers: { authorization: `Bearer ${made.key}`, "content-type": "application/json" },
    ...(body === undefined ? {} : { body: JSON.stringify(body) }),
  });
}

/** Each step stands on the one before it: after a failure the others say nothing. */
let broken = false;
beforeEach(({ skip }) => skip(broken, "an earlier step failed"));
afterEach(({ task }) => {
  broken ||= task.result?.state === "fail";
});

describe("from readings to a traced device", () => {
  it("publishes a family by two people", async () => {
    await fillFamily();
    await page("engineer").getByRole("button", { name: "Ask for publishing" }).click();
    await page("engineer").getByText("in review").first().waitFor();
    await publish(`/families/${FAMILY}`);
  });

  it("writes a layout in the editor and publishes it by two people", async () => {
    const engineer = page("engineer");
    const layout = { ...JSON.parse(readFileSync(join(GOLDEN, "layout.json"), "utf8")), family: FAMILY };
    await engineer.goto(`/families/${FAMILY}/layouts/new`);
    await engineer.locator(".monaco-editor").first().click();
    await engineer.keyboard.press("ControlOrMeta+A");
    await engineer.keyboard.insertText(JSON.stringify(layout));
    await engineer.getByRole("button", { name: "Add as a draft" }).click();
    await engineer.waitForURL(`**/families/${FAMILY}/layouts/1.0.0`);
    await engineer.getByRole("button", { name: "Ask for publishing" }).click();
    await engineer.getByText("in review").first().waitFor();
    await publish(`/families/${FAMILY}/layouts/1.0.0`);
  });

  it("takes a lot's readings, all of a file or none of it", async () => {
    const engineer = page("engineer");
    await engineer.goto("/lots/new");
    await engineer.getByLabel("Code").fill(LOT);
    await engineer.getByLabel("Family").selectOption(FAMILY);
    await engineer.getByLabel("Firmware in the devices").fill("2.3.0");
    await engineer.getByRole("button", { name: "Make the lot" }).click();
    await engineer.waitForURL(`**/lots/${LOT}`);

    await engineer.goto(`/lots/${LOT}/readings`);
    const good = readFileSync(join(GOLDEN, "readings-sample.csv"), "utf8").split("\n");
    const broken = [...good.slice(0, 3), good[3]?.replace(/,[^,]*$/, ",yesterday"), ...good.slice(4)].join("\n");
    const file = { name: "broken.csv", mimeType: "text/csv", buffer: Buffer.from(broken) };
    await engineer.locator("input[type=file]").setInputFiles(file);
    await engineer.getByLabel("Purpose").selectOption("sample");
    await engineer.getByLabel("Add devices that the lot doesn't have yet").check();
    // The error stands at its cell before anything is sent, and nothing can be sent with it.
    await engineer.getByText("Takes a time with its offset (RFC 3339)").waitFor();
    expect(await engineer.getByRole("button", { name: "Upload the run" }).isDisabled()).toBe(true);
    await engineer.reload();
    await engineer.getByText("No readings yet").waitFor();

    for (const purpose of ["sample", "zero", "span", "verification"]) await uploadRun(purpose);
  });

  it("derives in the worker, and only a reviewer may approve", async () => {
    const engineer = page("engineer");
    await engineer.goto(`/lots/${LOT}/coefficients`);
    await engineer.getByRole("button", { name: "Derive and propose" }).click();
    await engineer.waitForURL("**/derivations/*");
    made.derivation = new URL(engineer.url()).pathname.split("/").at(-1) ?? "";
    await engineer.getByText("proposed").first().waitFor();
    await engineer.getByText("The lot's gain coefficient").waitFor();
    expect(await engineer.getByRole("button", { name: /^Approve/ }).count()).toBe(0);

    const reviewer = page("reviewer");
    await reviewer.goto(`/derivations/${made.derivation}`);
    await reviewer.locator("summary", { hasText: "Findings (" }).click();
    for (const reason of await reviewer.locator("textarea[name^='accept ']").all()) {
      await reason.fill("Looked at; of no weight for this class");
    }
    await reviewer.getByLabel("Your password").fill("not the password");
    await reviewer.getByRole("button", { name: `Approve ${DEVICES} devices` }).click();
    await reviewer.getByText("This is not your password").waitFor();
    await reviewer.getByLabel("Your password").fill(DEMO_PASSWORD);
    await reviewer.getByRole("button", { name: `Approve ${DEVICES} devices` }).click();
    await reviewer.getByText(`Approved coefficients of ${LOT}`, { exact: true }).waitFor();
  });

  it("builds a package and asks for its review", async () => {
    const engineer = page("engineer");
    await engineer.goto(`/lots/${LOT}/packages`);
    await engineer.getByRole("button", { name: `Build a package of ${DEVICES} devices` }).click();
    await engineer.waitForURL("**/packages/*");
    made.package = new URL(engineer.url()).pathname.split("/").at(-1) ?? "";
    await engineer.getByRole("button", { name: "Ask for review" }).waitFor({ timeout: 60_000 });

    const reviewer = page("reviewer");
    await reviewer.goto(`/packages/${made.package}/checks`);
    while ((await reviewer.getByRole("button", { name: "Waive this warning" }).count()) > 0) {
      await reviewer.getByRole("button", { name: "Waive this warning" }).first().click();
      await confirm("reviewer", "Waive it", "Known and accepted for the first lot of this make");
      await reviewer.reload();
    }
    await engineer.reload();
    await engineer.getByRole("button", { name: "Ask for review" }).click();
    await engineer.getByRole("dialog").getByRole("button", { name: "Ask for review" }).click();
    await engineer.getByText("in review").first().waitFor();
    await engineer.goto(`/packages/${made.package}/review`);
    await engineer.getByText("You can't:").waitFor();
    expect(await engineer.getByRole("button", { name: /^Approve release/ }).count()).toBe(0);
  });

  it("is approved after the differences were opened, then released", async () => {
    const reviewer = page("reviewer");
    await reviewer.goto(`/packages/${made.package}/review`);
    const approve = reviewer.getByRole("button", { name: "Approve release 1.0.0" });
    expect(await approve.isDisabled()).toBe(true);
    await reviewer.getByRole("button", { name: "Open the values of all devices" }).click();
    await reviewer.getByLabel("Your password").fill(DEMO_PASSWORD);
    await approve.click();
    await reviewer.getByText("Release 1.0.0 approved", { exact: true }).waitFor();

    const engineer = page("engineer");
    await engineer.goto(`/packages/${made.package}`);
    await engineer.getByRole("button", { name: "Release 1.0.0" }).click();
    await confirm("engineer", "Release 1.0.0");
    await engineer.getByText("Release 1.0.0 is live", { exact: true }).waitFor();
  });

  it("hands a station the signed bundle, and takes its records", async () => {
    const admin = page("admin");
    await admin.goto("/stations");
    await admin.getByRole("button", { name: "Add a station" }).first().click();
    const dialog = admin.getByRole("dialog");
    await dialog.getByLabel("Name").fill("Bench 9");
    await dialog.getByLabel(FAMILY).check();
    await dialog.getByRole("button", { name: "Add the station" }).click();
    await admin.waitForURL("**/stations/*");
    await admin.getByRole("button", { name: "Make a key" }).first().click();
    await confirm("admin", "Make the key");
    made.key = (await admin.locator("code", { hasText: /^tws_/ }).textContent())?.trim() ?? "";
    expect(made.key).toMatch(/^tws_/);

    const live = await (await asStation("/station/live")).json();
    expect(live.items).toMatchObject([{ lot: LOT, package: made.package, version: "1.0.0", devices: DEVICES }]);
    const answer = await asStation(`/station/packages/${made.package}/bundle`);
    const bundle = Buffer.from(await answer.arrayBuffer());
    expect(Number(answer.headers.get("content-length"))).toBe(bundle.length);
    const headers = { authorization: `Bearer ${made.key}`, range: "bytes=5-104" };
    for (const method of ["GET", "HEAD"]) {
      const part = await fetch(`${origin}/api/v1/station/packages/${made.package}/bundle`, { method, headers });
      expect([part.status, part.headers.get("content-length")]).toEqual([206, "100"]);
      expect(Buffer.from(await part.arrayBuffer())).toEqual(bundle.subarray(5, method === "GET" ? 105 : 5));
    }
    const manifest = await unpacked(bundle, (folder) => {
      expect(failingCommands(folder)).toEqual([]);
      return JSON.parse(readFileSync(join(folder, "manifest.json"), "utf8"));
    });
    const at = new Date();
    const writes = manifest.images.map((image: { serial: string; sha256: string }, index: number) => ({
      id: uuidv7(),
      counter: index + 1,
      serial: image.serial,
      package: made.package,
      imageSha256: image.sha256,
      result: "written",
      readbackSha256: index === 3 ? "0".repeat(64) : image.sha256,
      startedAt: at.toISOString(),
      finishedAt: at.toISOString(),
      operator: "lq",
    }));
    const { results } = await (await asStation("/station/writes", { writes })).json();
    const outcomes = results.map((result: { outcome: string }) => result.outcome);
    expect(outcomes.filter((outcome: string) => outcome === "verified")).toHaveLength(DEVICES - 1);
    expect(outcomes[3]).toBe("mismatch");
  });

  it("tells an operator what to write", async () => {
    const operator = page("operator");
    await operator.goto("/stations/bench");
    await operator.getByText(LOT).click();
    await operator.locator("#scan").fill("MW20-2609-00005");
    await operator.keyboard.press("Enter");
    await operator.getByRole("status").getByText("MW20-2609-00005").waitFor();
  });

  it("tells service what a serial carries and whether a dump is it", async () => {
    const service = page("service");
    await service.goto("/trace/MW20-2609-00005");
    await service.getByText("carries the live image").first().waitFor();
    const hex = (serial: string) =>
      service.request.get(`/api/v1/packages/${made.package}/images/${serial}`, {
        headers: { accept: "text/x-intel-hex" },
      });
    const own = await (await hex("MW20-2609-00005")).body();
    const other = await (await hex("MW20-2609-00006")).body();
    const check = async (body: Buffer) => {
      const reply = await service.request.post("/api/v1/devices/MW20-2609-00005/dump", {
        headers: { "content-type": "text/x-intel-hex", origin },
        data: body,
      });
      return (await reply.json()).match;
    };
    expect(await check(own)).toBe("exact");
    expect(await check(other)).toBe("other-serial");
    await service.locator("input[type=file]").setInputFiles({ name: "a.hex", mimeType: "text/plain", buffer: other });
    await service.getByText("MW20-2609-00006").first().waitFor();
    await service.goto("/trace/MW20-2609-00004");
    await service.getByText("unknown").first().waitFor();
  });

  it("answers an auditor with a chain that verifies", async () => {
    const auditor = page("auditor");
    await auditor.goto("/ledger");
    await auditor.getByRole("button", { name: /^Verify/ }).click();
    await auditor
      .getByText(/holds|unbroken|verified/i)
      .first()
      .waitFor();
    const verified = await (await auditor.request.get("/api/v1/ledger/verify")).json();
    expect(verified.ok).toBe(true);
  });

  it("ends a copied cookie with the sign-out", async () => {
    const operator = visitors.operator;
    const cookies = await operator.context.cookies();
    const copied = cookies.map(({ name, value }) => `${name}=${value}`).join("; ");
    const ask = () => fetch(`${origin}/api/v1/devices/MW20-2609-00005`, { headers: { cookie: copied } });
    expect((await ask()).status).toBe(200);
    const { csrfToken } = await (await operator.page.request.get("/api/auth/csrf")).json();
    await operator.page.request.post("/api/auth/signout", { form: { csrfToken }, headers: { origin } });
    expect((await ask()).status).toBe(401);
  });

  it("raised no error in any browser and talked to no other host", () => {
    for (const name of people) expect({ [name]: visitors[name].errors }).toEqual({ [name]: [] });
  });
});
