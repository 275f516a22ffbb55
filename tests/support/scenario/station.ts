import { v7 as uuidv7 } from "uuid";
import type { TestApi } from "../api";
import { PASSWORD } from "../people";

export interface TestStation {
  id: string;
  name: string;
  /** Its bearer key. */
  key: string;
}

/** A station with a key that may write lots of the families. */
export async function arrangeStation(api: TestApi, name: string, families: string[] = ["MW-20"]): Promise<TestStation> {
  const { id } = (await api.call("POST", "/stations", { as: "admin", body: { name, families } })).body;
  const made = await api.call("POST", `/stations/${id}/keys`, { as: "admin", body: { password: PASSWORD } });
  return { id, name, key: made.body.key };
}

export interface TestReport {
  id: string;
  counter: number;
  serial: string;
  package: string;
  imageSha256: string;
  result: "written" | "failed" | "interrupted";
  readbackSha256: string | null;
  startedAt: string;
  finishedAt: string;
  operator: string;
  [more: string]: unknown;
}

let counter = 0;

/** Digests of a package's images by serial. */
export async function imageDigests(api: TestApi, packageId: string): Promise<Map<string, string>> {
  const rows = await api.owner
    .selectFrom("image")
    .select(["serial", "sha256"])
    .where("packageId", "=", packageId)
    .execute();
  return new Map(rows.map((row) => [row.serial, row.sha256.toString("hex")]));
}

/** A record of a write that went well just now, counting up; `change` says what was otherwise. */
export async function reportOf(
  api: TestApi,
  write: { package: string; serial: string },
  change: Partial<TestReport> = {},
): Promise<TestReport> {
  const imageSha256 = (await imageDigests(api, write.package)).get(write.serial) ?? "0".repeat(64);
  const finishedAt = new Date();
  counter += 1;
  return {
    id: uuidv7(),
    counter,
    serial: write.serial,
    package: write.package,
    imageSha256,
    result: "written",
    readbackSha256: imageSha256,
    startedAt: new Date(finishedAt.getTime() - 4_000).toISOString(),
    finishedAt: finishedAt.toISOString(),
    operator: "O. Perator",
    ...change,
  };
}

/** Sends records as a station. */
export function sendWrites(api: TestApi, station: TestStation, writes: unknown[]) {
  return api.call("POST", "/station/writes", { as: { bearer: station.key }, body: { writes } });
}
