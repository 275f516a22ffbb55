import { execFileSync } from "node:child_process";
import { writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { beforeAll, describe, expect, it } from "vitest";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD } from "../support/people";
import { deriveGolden, type ReadLot, uploadGoldenRuns } from "../support/scenario/derived";
import { arrangeFamilyLot, arrangeSecondFamilyLot, type ScenarioPeople } from "../support/scenario/family-lot";

// biome-ignore lint/suspicious/noExplicitAny: replies are looked at member by member; the routes check them themselves.
type Reply = any;

const LEFT_OUT = "MW20-2609-00005";
let api: TestApi;
let people: ScenarioPeople;
let read: ReadLot;
let whole: string;
let without: string;

beforeAll(async () => {
  api = await openTestApi();
  people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  read = await uploadGoldenRuns(people, await arrangeFamilyLot(people));
  whole = (await deriveGolden(people, read)).derivation;
  without = (await deriveGolden(people, read, [{ serial: LEFT_OUT, reason: "Connector loose" }])).derivation;
});

const compare = (query: Record<string, string | number>, as: "auditor" | "operator" = "auditor") =>
  api.call("GET", "/derivations/compare", { as, query });

describe("comparing two derivations", () => {
  it("tells what differs in the facts, and device by device the largest effect first", async () => {
    const { status, body } = await compare({ from: whole, to: without, limit: 1000 });
    expect(status, JSON.stringify(body)).toBe(200);
    expect(body.counts).toEqual({ values: 27, added: 0, removed: 1, same: 0 });
    expect(body.to.exclude).toEqual([{ serial: LEFT_OUT, reason: "Connector loose" }]);
    expect([body.from.pooled.n, body.to.pooled.n]).toEqual([10, 9]);
    expect(body).toMatchObject({ rangeC: [8.06, 41.9], proven: true, next: null });
    const effects = body.items.filter((one: Reply) => one.effectV !== null).map((one: Reply) => Math.abs(one.effectV));
    expect(effects).toEqual([...effects].sort((a, b) => b - a));
    expect(Math.abs(body.largestEffectV)).toBe(effects[0]);
    expect(body.items.at(-1)).toMatchObject({ serial: LEFT_OUT, change: "removed", effectV: null });
    const [first] = body.items;
    const gainTc = first.coefficients.find((one: Reply) => one.name === "gainTc");
    expect(gainTc.step).toBeCloseTo(body.to.pooled.gainTc - body.from.pooled.gainTc, 15);
    expect(first.coefficients.map((one: Reply) => one.name)).not.toContain("zeroTc");
  });

  it("comes in pages that together are the whole, and by change", async () => {
    const all = (await compare({ from: whole, to: without, limit: 1000 })).body.items;
    const paged: Reply[] = [];
    let cursor = "";
    do {
      const { body } = await compare({ from: whole, to: without, limit: 9, ...(cursor && { cursor }) });
      paged.push(...body.items);
      cursor = body.next ?? "";
    } while (cursor);
    expect(paged).toEqual(all);
    const removed = (await compare({ from: whole, to: without, change: "removed" })).body.items;
    expect(removed.map((one: Reply) => one.serial)).toEqual([LEFT_OUT]);
    const back = (await compare({ from: without, to: whole, change: "added" })).body.items;
    expect(back.map((one: Reply) => one.serial)).toEqual([LEFT_OUT]);
  });

  it("finds nothing between a derivation and itself", async () => {
    const { body } = await compare({ from: whole, to: whole });
    expect(body).toMatchObject({ items: [], largestEffectV: null, counts: { same: 28, values: 0 } });
  });

  it("refuses other lots, what is not there, what is not computed yet, and who may not look", async () => {
    const second = await uploadGoldenRuns(people, await arrangeSecondFamilyLot(people));
    const { derivation: other } = await deriveGolden(people, second);
    const nowhere = "0192f3a0-0000-7000-8000-000000000000";
    const answers = async (query: Record<string, string>) => {
      const { status, body } = await compare(query);
      return [status, body.code];
    };
    expect(await answers({ from: whole, to: other })).toEqual([422, "derivation.other_lot"]);
    expect(await answers({ from: whole, to: nowhere })).toEqual([404, "derivation.not_found"]);
    expect(await answers({ from: whole, to: "x" })).toEqual([422, "request.invalid"]);
    expect(await answers({ from: whole })).toEqual([422, "request.invalid"]);
    expect((await compare({ from: whole, to: without }, "operator")).status).toBe(403);
    expect((await api.call("GET", "/derivations/compare", { query: { from: whole, to: without } })).status).toBe(401);
    const started = await api.call("POST", `/lots/${read.lot}/derivations`, {
      as: "engineer",
      body: { method: "individual", order: 1, runs: [read.runs.sample] },
    });
    expect(await answers({ from: whole, to: started.body.id })).toEqual([409, "derivation.running"]);
    await api.runJobs();
    expect((await compare({ from: whole, to: started.body.id })).body.counts).toMatchObject({
      values: 10,
      removed: 18,
    });
  });
});

describe("the devices as a file", () => {
  const file = (query: Record<string, string>, headers: Record<string, string> = {}) =>
    api.call("GET", `/derivations/${without}/devices`, { as: "auditor", query, headers });
  const devices = async (): Promise<Reply[]> =>
    (await api.call("GET", `/derivations/${without}/devices`, { as: "auditor", query: { limit: 1000 } })).body.items;

  it("is CSV with units in the headings and numbers in full", async () => {
    const reply = await file({ format: "csv" });
    expect(reply.headers.get("content-type")).toBe("text/csv; charset=utf-8");
    expect(reply.headers.get("content-disposition")).toContain(".csv");
    const [header = [], ...rows] = reply.body
      .trim()
      .split("\r\n")
      .map((line: string) => line.split(","));
    expect(header).toContain("gainTc (1/K)");
    const at = (name: string) => header.indexOf(name);
    const items = await devices();
    expect(rows).toHaveLength(items.length);
    for (const [index, device] of items.entries()) {
      const row = rows[index] ?? [];
      expect(row[0]).toBe(device.serial);
      const value = device.coefficients?.gainTc;
      expect(row[at("gainTc (1/K)")]).toBe(value === undefined ? "" : String(value));
    }
    const left = rows.find((row: string[]) => row[0] === LEFT_OUT) ?? [];
    expect(left[at("codes of findings")]).toBe("device.excluded");
  });

  it("has no cell that a spreadsheet would run, negative numbers aside", async () => {
    const reply = await file({}, { accept: "text/csv" });
    for (const line of reply.body.split("\r\n").slice(1))
      for (const cell of line.split(",")) expect(cell).toMatch(/^$|^[A-Za-z0-9]|^-?\d/);
  });

  it("is a workbook that another program reads, the same bytes each time", async () => {
    const reply = await file({ format: "xlsx" });
    expect(reply.headers.get("content-type")).toMatch(/spreadsheetml\.sheet$/);
    expect(reply.body.equals((await file({}, { accept: reply.headers.get("content-type") ?? "" })).body)).toBe(true);
    const path = join(tmpdir(), `trimwright-devices-${process.pid}.xlsx`);
    writeFileSync(path, reply.body);
    // Python's zipfile and xml.etree as the outside reader.
    const script = `
import json, sys, zipfile, xml.etree.ElementTree as E
m = "{http://schemas.openxmlformats.org/spreadsheetml/2006/main}"
root = E.fromstring(zipfile.ZipFile(sys.argv[1]).read("xl/worksheets/sheet1.xml"))
rows = [{c.get("r").rstrip("0123456789"): (float(c.find(m + "v").text) if c.get("t") is None else c.find(".//" + m + "t").text) for c in r.iter(m + "c")} for r in root.iter(m + "row")]
print(json.dumps(rows))`;
    const rows = JSON.parse(execFileSync("python3", ["-c", script, path], { encoding: "utf8" }));
    const column = Object.entries(rows[0]).find(([, heading]) => heading === "gain (1)")?.[0] ?? "";
    const items = await devices();
    expect(rows).toHaveLength(items.length + 1);
    for (const [index, device] of items.entries()) {
      expect(rows[index + 1].A).toBe(device.serial);
      expect(rows[index + 1][column]).toBe(device.coefficients?.gain);
    }
  });

  it("refuses other formats", async () => {
    expect((await file({ format: "pdf" })).status).toBe(422);
    expect((await file({}, { accept: "image/png" })).status).toBe(406);
  });
});
