import { expect } from "vitest";
import type { CallOptions, Reply, TestApi } from "../api";
import { PASSWORD } from "../people";
import type { GoldenLot } from "./golden";

export interface ReleasedThroughApi {
  derivation: string;
  package: string;
}

const PURPOSES = ["sample", "zero", "span", "verification"] as const;
const approve = { decision: "approve", password: PASSWORD };

/**
 * Takes a golden example from its family to a live package by nothing but calls of the API, as clients make them: the
 * engineer writes, the reviewer decides. Every call has to succeed.
 */
export async function releaseThroughApi(api: TestApi, golden: GoldenLot): Promise<ReleasedThroughApi> {
  await publishFamilyAndLayout(api, golden);
  const derivation = await deriveLot(api, golden);
  const id = await buildPackage(api, golden);
  await signPackage(api, id);
  return { derivation, package: id };
}

async function succeed(api: TestApi, path: string, options: CallOptions): Promise<Reply["body"]> {
  const { status, body } = await api.call("POST", path, options);
  const problem = status < 300 ? null : body?.code;
  expect({ path, status, problem }).toEqual({ path, status: expect.any(Number), problem: null });
  return body;
}

async function publishFamilyAndLayout(api: TestApi, { family, layout, layoutVersion }: GoldenLot): Promise<void> {
  const base = `/families/${family.code}`;
  await succeed(api, "/families", { as: "engineer", body: family });
  await succeed(api, `${base}/revisions/1/submit`, { as: "engineer" });
  await succeed(api, `${base}/revisions/1/decisions`, { as: "reviewer", body: approve });
  const json = { "content-type": "application/json" };
  await succeed(api, `${base}/layouts`, { as: "engineer", body: layout, headers: json });
  await succeed(api, `${base}/layouts/${layoutVersion}/submit`, { as: "engineer" });
  await succeed(api, `${base}/layouts/${layoutVersion}/decisions`, { as: "reviewer", body: approve });
}

async function deriveLot(api: TestApi, golden: GoldenLot): Promise<string> {
  const { lot, firmware, family, serials } = golden;
  await succeed(api, "/lots", { as: "engineer", body: { code: lot, family: family.code, firmware } });
  await succeed(api, `/lots/${lot}/devices`, { as: "engineer", body: { serials } });
  const runs: string[] = [];
  for (const purpose of PURPOSES) {
    const body = golden.read(`readings-${purpose}.csv`).toString("utf8");
    const options = { query: { purpose }, headers: { "content-type": "text/csv" } };
    runs.push((await succeed(api, `/lots/${lot}/runs`, { as: "engineer", body, ...options })).id);
  }
  const { exclude: serialsOut = [] } = JSON.parse(golden.read("expected-coefficients.json").toString()) as {
    exclude?: string[];
  };
  const exclude = serialsOut.map((serial) => ({ serial, reason: "Connector was loose during the run" }));
  const derivation = { method: "pooled-gain", order: 1, runs, exclude };
  const { id } = await succeed(api, `/lots/${lot}/derivations`, { as: "engineer", body: derivation });
  await api.runJobs();
  const { findings } = (await api.call("GET", `/derivations/${id}`, { as: "reviewer" })).body;
  const soft = (findings as { code: string; severity: string }[]).filter((one) => one.severity === "soft");
  const acknowledge = [...new Set(soft.map((one) => one.code))].map((finding) => ({ finding, reason: "Looked at" }));
  await succeed(api, `/derivations/${id}/decisions`, { as: "reviewer", body: { ...approve, acknowledge } });
  return id;
}

async function buildPackage(api: TestApi, { lot, layoutVersion }: GoldenLot): Promise<string> {
  const { id } = await succeed(api, `/lots/${lot}/packages`, { as: "engineer", body: { layout: layoutVersion } });
  await api.runJobs();
  return id;
}

async function signPackage(api: TestApi, id: string): Promise<void> {
  const { checks } = (await api.call("GET", `/packages/${id}`, { as: "reviewer" })).body;
  for (const { code, verdict } of checks as { code: string; verdict: string }[]) {
    if (verdict !== "warn") continue;
    const waiver = { check: code, reason: "Looked at, of no weight here", password: PASSWORD };
    await succeed(api, `/packages/${id}/waivers`, { as: "reviewer", body: waiver });
  }
  await succeed(api, `/packages/${id}/submit`, { as: "engineer" });
  const { reviewDigest } = (await api.call("GET", `/packages/${id}`, { as: "reviewer" })).body;
  await succeed(api, `/packages/${id}/decisions`, { as: "reviewer", body: { ...approve, reviewDigest } });
  await succeed(api, `/packages/${id}/release`, { as: "engineer", body: { password: PASSWORD } });
  await api.runJobs();
}
