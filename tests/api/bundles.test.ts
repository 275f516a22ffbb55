import { createHash, randomBytes } from "node:crypto";
import { CompiledQuery, type Updateable } from "kysely";
import { v7 as uuidv7 } from "uuid";
import { beforeAll, describe, expect, it } from "vitest";
import { readZip } from "@/builders/bundle/read-zip";
import { verifyBundle } from "@/builders/bundle/verify-bundle";
import type { PackageFile } from "@/db/generated/types.generated";
import { BUNDLE_CHUNK_BYTES } from "@/db/queries/bundles";
import { assembleBundle } from "@/lib/services/packages/assemble-bundle";
import { withdrawPackage } from "@/lib/services/packages/release-package";
import { openTestApi, type TestApi } from "../support/api";
import { systemContext } from "../support/jobs";
import { PASSWORD } from "../support/people";
import { arrangeDerived, type DerivedLot } from "../support/scenario/derived";
import type { ScenarioPeople } from "../support/scenario/family-lot";
import {
  approveSubmitted,
  type BuiltPackage,
  buildGolden,
  releaseApproved,
  submitBuilt,
} from "../support/scenario/packaged";
import { arrangeStation, type TestStation } from "../support/scenario/station";

let api: TestApi;
let people: ScenarioPeople;
let lot: DerivedLot;
/** Live at first, superseded from "a superseded package" on. */
let first: BuiltPackage;
/** A draft at first, live and then withdrawn later on. */
let second: BuiltPackage;
let station: TestStation;

const rawSql = (text: string) => CompiledQuery.raw(text);
const sha256 = (bytes: Buffer) => createHash("sha256").update(bytes);
const bundleOf = (id: string, headers: Record<string, string> = {}) =>
  api.call("GET", `/packages/${id}/bundle`, { as: "engineer", headers });
const stationBundle = (id: string, key = station.key, headers: Record<string, string> = {}) =>
  api.call("GET", `/station/packages/${id}/bundle`, { as: { bearer: key }, headers });
const release = async (built: BuiltPackage) => {
  await submitBuilt(people, built);
  await approveSubmitted(people, built);
  return releaseApproved(people, built);
};
const countBundles = async (id: string) =>
  (await api.db.selectFrom("bundle").select("sequence").where("packageId", "=", id).execute()).length;

beforeAll(async () => {
  api = await openTestApi();
  people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  lot = await arrangeDerived(people);
  first = await buildGolden(people, lot);
  station = await arrangeStation(api, "Bench 1");
  await release(first);
  second = await buildGolden(people, lot);
});

describe("GET /packages/{id}/manifest", () => {
  it("answers the very bytes whose SHA-256 is the package digest", async () => {
    const { status, headers, body } = await api.call("GET", `/packages/${first.id}/manifest`, { as: "auditor" });
    const { digest } = (await api.call("GET", `/packages/${first.id}`, { as: "auditor" })).body;
    expect(status).toBe(200);
    expect(headers.get("etag")).toBe(`"${digest}"`);
    expect(headers.get("repr-digest")).toBe(`sha-256=:${Buffer.from(digest, "hex").toString("base64")}:`);
    expect(headers.get("content-type")).toBe("application/json");
    const stored = await api.db
      .selectFrom("packageFile")
      .select("content")
      .where("packageId", "=", first.id)
      .where("name", "=", "manifest.json")
      .executeTakeFirstOrThrow();
    const content = stored.content as Buffer;
    expect(Number(headers.get("content-length"))).toBe(content.length);
    expect(sha256(content).digest("hex")).toBe(digest);
    expect(body).toEqual(JSON.parse(content.toString("utf8")));
  });

  it("knows ranges and what the client has already", async () => {
    const path = `/packages/${first.id}/manifest`;
    const etag = (await api.call("GET", path, { as: "auditor" })).headers.get("etag") as string;
    expect((await api.call("GET", path, { as: "auditor", headers: { "if-none-match": etag } })).status).toBe(304);
    const outside = await api.call("GET", path, { as: "auditor", headers: { range: "bytes=99999999-" } });
    expect(outside).toMatchObject({ status: 416, body: { code: "request.range_invalid" } });
  });
});

describe("the bundle of a live package", () => {
  it("is made at the first request where the job did not make it, once however many ask at the same time", async () => {
    expect(await countBundles(first.id)).toBe(0);
    const replies = await Promise.all(Array.from({ length: 6 }, () => bundleOf(first.id)));
    expect(replies.map((reply) => reply.status)).toEqual(Array(6).fill(200));
    for (const reply of replies) expect(reply.body.equals(replies[0]?.body)).toBe(true);
    expect(await countBundles(first.id)).toBe(1);
  });

  it("is what its headers say", async () => {
    const { headers, body } = await bundleOf(first.id);
    expect(headers.get("content-type")).toBe("application/zip");
    expect(Number(headers.get("content-length"))).toBe(body.length);
    expect(headers.get("content-disposition")).toBe('attachment; filename="MW20-2609-1.0.0.zip"');
    expect(headers.get("etag")).toBe(`"${sha256(body).digest("hex")}"`);
    expect(headers.get("repr-digest")).toBe(`sha-256=:${sha256(body).digest("base64")}:`);
    expect(headers.get("accept-ranges")).toBe("bytes");
    expect(headers.get("cache-control")).toContain("no-transform");
  });

  it("holds the release and verifies against the published keys", async () => {
    const { body } = await bundleOf(first.id);
    const { items } = (await api.call("GET", "/signing-keys")).body;
    const trustedKeys = items.map((key: { keyId: string; pem: string }) => ({ keyId: key.keyId, pem: key.pem }));
    expect(verifyBundle(body, { trustedKeys }).steps.filter((step) => !step.ok)).toEqual([]);
    const files = readZip(body);
    expect([...files.keys()].filter((path) => !path.startsWith("images/"))).toEqual([
      "SHA256SUMS",
      "VERIFY.txt",
      "images.jsonl",
      "manifest.json",
      "release.json",
      "release.sig",
      "signing-key.pem",
    ]);
    expect([...files.keys()].filter((path) => path.startsWith("images/"))).toHaveLength(28);
  });

  it("comes in pieces that join to the whole, from either end", async () => {
    const { body } = await bundleOf(first.id);
    const length: number = body.length;
    const cuts = [0, 1, 1_000, Math.floor(length / 2), length - 7, length];
    const parts: Buffer[] = [];
    for (const [i, from] of cuts.slice(0, -1).entries()) {
      const to = (cuts[i + 1] as number) - 1;
      const part = await bundleOf(first.id, { range: `bytes=${from}-${to}` });
      expect(part.status).toBe(206);
      expect(part.headers.get("content-range")).toBe(`bytes ${from}-${to}/${length}`);
      expect(Number(part.headers.get("content-length"))).toBe(to - from + 1);
      parts.push(part.body);
    }
    expect(Buffer.concat(parts).equals(body)).toBe(true);
    const suffix = await bundleOf(first.id, { range: "bytes=-100" });
    expect(suffix.body.equals(body.subarray(length - 100))).toBe(true);
    const open = await bundleOf(first.id, { range: `bytes=${length - 5}-` });
    expect(open.body.equals(body.subarray(length - 5))).toBe(true);
  });

  it("goes on from a range only where it is still the same, and names its length where a range is outside", async () => {
    const { body, headers } = await bundleOf(first.id);
    const etag = headers.get("etag") as string;
    expect((await bundleOf(first.id, { range: "bytes=5-9", "if-range": etag })).status).toBe(206);
    const other = await bundleOf(first.id, { range: "bytes=5-9", "if-range": '"other"' });
    expect(other.status).toBe(200);
    expect(other.body.equals(body)).toBe(true);
    const outside = await bundleOf(first.id, { range: `bytes=${body.length}-` });
    expect(outside).toMatchObject({ status: 416, body: { code: "request.range_invalid", length: body.length } });
    expect(outside.headers.get("content-range")).toBe(`bytes */${body.length}`);
    expect((await bundleOf(first.id, { range: "bytes=0-1,5-6" })).status).toBe(200);
  });

  it("is not sent again to who has it", async () => {
    const etag = (await bundleOf(first.id)).headers.get("etag") as string;
    const again = await bundleOf(first.id, { "if-none-match": `"x", ${etag}` });
    expect(again).toMatchObject({ status: 304, body: null });
    expect(again.headers.get("etag")).toBe(etag);
    expect((await bundleOf(first.id, { "if-none-match": '"x"' })).status).toBe(200);
  });

  it("is refused to strangers, operators and by an id that is none", async () => {
    expect((await api.call("GET", `/packages/${first.id}/bundle`)).status).toBe(401);
    const operator = await api.call("GET", `/packages/${first.id}/bundle`, { as: "operator" });
    expect(operator).toMatchObject({ status: 403, body: { code: "auth.forbidden" } });
    expect(await bundleOf(uuidv7())).toMatchObject({ status: 404, body: { code: "package.not_found" } });
    const byStation = await api.call("GET", `/packages/${first.id}/bundle`, { as: { bearer: station.key } });
    expect(byStation.status).toBe(403);
  });
});

describe("a preview", () => {
  it("says that it is not released, signs nothing and stays the same from draft to approval", async () => {
    const draft = await bundleOf(second.id);
    expect(draft.status).toBe(200);
    expect(draft.headers.get("content-disposition")).toContain("MW20-2609-1.0.1-preview.zip");
    const files = readZip(draft.body);
    expect(Buffer.from(files.get("NOT-RELEASED.txt") as Uint8Array).toString()).toContain("is not released");
    for (const path of ["release.json", "release.sig", "signing-key.pem"]) expect(files.has(path)).toBe(false);
    expect(verifyBundle(draft.body).ok).toBe(false);
    await submitBuilt(people, second);
    await approveSubmitted(people, second);
    expect((await bundleOf(second.id)).body.equals(draft.body)).toBe(true);
  });

  it("is refused to stations", async () => {
    expect(await stationBundle(second.id)).toMatchObject({ status: 409, body: { code: "station.package_not_live" } });
  });
});

describe("a bundle of several stored pieces", () => {
  it("is cut rightly wherever a range begins and ends", async () => {
    const large = await buildGolden(people, lot);
    const content = randomBytes(2 * BUNDLE_CHUNK_BYTES + 1_234);
    const key = { packageId: large.id, sequence: 0 };
    for (let position = 0; position < 3; position++) {
      const piece = content.subarray(position * BUNDLE_CHUNK_BYTES, (position + 1) * BUNDLE_CHUNK_BYTES);
      await api.db
        .insertInto("bundleChunk")
        .values({ ...key, position, content: piece })
        .execute();
    }
    const facts = { byteCount: content.length, sha256: sha256(content).digest(), madeAt: new Date() };
    await api.db
      .insertInto("bundle")
      .values({ ...key, ...facts })
      .execute();
    expect((await bundleOf(large.id)).body.equals(content)).toBe(true);
    const edge = BUNDLE_CHUNK_BYTES;
    const ranges = [
      [edge - 1, edge],
      [edge, edge],
      [edge - 1, edge - 1],
      [5, 2 * edge + 5],
      [2 * edge, content.length - 1],
      [0, content.length - 1],
    ] as const;
    for (const [from, to] of ranges) {
      const part = await bundleOf(large.id, { range: `bytes=${from}-${to}` });
      expect(part.status).toBe(206);
      expect(part.body.equals(content.subarray(from, to + 1)), `${from}-${to}`).toBe(true);
    }
  });
});

describe("GET /station/packages/{id}/bundle", () => {
  it("answers the live bundle, in ranges and with its tag", async () => {
    const whole = await stationBundle(first.id);
    expect(whole.status).toBe(200);
    expect(whole.body.equals((await bundleOf(first.id)).body)).toBe(true);
    const part = await stationBundle(first.id, station.key, { range: "bytes=10-19" });
    expect(part.status).toBe(206);
    expect(part.body.equals(whole.body.subarray(10, 20))).toBe(true);
    const etag = whole.headers.get("etag") as string;
    expect((await stationBundle(first.id, station.key, { "if-none-match": etag })).status).toBe(304);
  });

  it("is refused to stations of other families, to people and to nobody", async () => {
    await api.call("POST", "/families", {
      as: "engineer",
      body: { ...lot.family, code: "MW-300" },
    });
    const other = await arrangeStation(api, "Bench 2", ["MW-300"]);
    const refused = await stationBundle(first.id, other.key);
    expect(refused).toMatchObject({ status: 403, body: { code: "station.family_not_allowed", family: "MW-20" } });
    expect((await api.call("GET", `/station/packages/${first.id}/bundle`)).status).toBe(401);
    expect((await api.call("GET", `/station/packages/${first.id}/bundle`, { as: "engineer" })).status).toBe(403);
    expect((await stationBundle(uuidv7())).status).toBe(404);
  });
});

describe("a superseded package", () => {
  it("keeps the signed bundle of its release for readers, not for stations", async () => {
    const before = (await bundleOf(first.id)).body;
    await releaseApproved(people, second);
    const after = await bundleOf(first.id);
    expect(after.body.equals(before)).toBe(true);
    expect(await stationBundle(first.id)).toMatchObject({
      status: 409,
      body: { code: "station.package_not_live", state: "superseded" },
    });
  });

  it("gives way to a package whose job has made the signed bundle", async () => {
    await api.runJobs();
    expect(await countBundles(second.id)).toBe(2);
    const live = await stationBundle(second.id);
    expect(verifyBundle(live.body).ok).toBe(true);
    const release = JSON.parse(Buffer.from(readZip(live.body).get("release.json") as Uint8Array).toString());
    expect(release).toMatchObject({ lot: lot.lot, version: "1.0.1", sequence: 2, kind: "release" });
  });

  it("does nothing when the job runs again", async () => {
    const before = await assembleBundle(systemContext(api.db), second.id);
    expect(await assembleBundle(systemContext(api.db), second.id)).toEqual(before);
    expect(await countBundles(second.id)).toBe(2);
  });
});

describe("a withdrawn package", () => {
  it("has a bundle for auditors only, the one that was live", async () => {
    const live = (await bundleOf(second.id)).body;
    await withdrawPackage(people.engineer, { id: second.id, reason: "Wrong loads in the run", password: PASSWORD });
    for (const as of ["engineer", "reviewer", "service", "admin"] as const) {
      const refused = await api.call("GET", `/packages/${second.id}/bundle`, { as });
      expect(refused).toMatchObject({ status: 410, body: { code: "package.withdrawn" } });
    }
    const audited = await api.call("GET", `/packages/${second.id}/bundle`, { as: "auditor" });
    expect(audited.status).toBe(200);
    expect(audited.body.equals(live)).toBe(true);
    expect(await stationBundle(second.id)).toMatchObject({ status: 409, body: { code: "station.package_not_live" } });
    expect((await api.call("GET", `/packages/${second.id}/manifest`, { as: "engineer" })).status).toBe(200);
  });
});

describe("a reinstated package", () => {
  it("has a bundle of its own with the sequence of its going live again, over the same images", async () => {
    const before = readZip((await bundleOf(first.id)).body);
    const asked = await api.call("POST", `/lots/${lot.lot}/reinstatements`, {
      as: "engineer",
      body: { package: first.id, reason: "1.0.1 was withdrawn", password: PASSWORD },
    });
    const decided = await api.call("POST", `/reinstatements/${asked.body.id}/decisions`, {
      as: "reviewer",
      body: { decision: "approve", password: PASSWORD },
    });
    expect([asked.status, decided.status]).toEqual([201, 200]);
    const live = await stationBundle(first.id);
    expect(live.status).toBe(200);
    const after = readZip(live.body);
    const record = JSON.parse(Buffer.from(after.get("release.json") as Uint8Array).toString());
    expect(record).toMatchObject({ sequence: 4, kind: "reinstatement", version: "1.0.0" });
    expect(verifyBundle(live.body).ok).toBe(true);
    for (const [path, content] of before) {
      if (path.startsWith("release.")) continue;
      expect(Buffer.from(after.get(path) as Uint8Array).equals(content), path).toBe(true);
    }
  });
});

describe("images.jsonl in a bundle", () => {
  /** Changes what was stored of it, as nothing but a hand in the database can. */
  const restore = async (id: string, values: Updateable<PackageFile>) =>
    api.owner.transaction().execute(async (trx) => {
      await trx.executeQuery(rawSql("alter table package_file disable trigger user"));
      await trx
        .updateTable("packageFile")
        .set(values)
        .where("packageId", "=", id)
        .where("name", "=", "images.jsonl")
        .execute();
      await trx.executeQuery(rawSql("alter table package_file enable trigger user"));
    });

  it("is the stored one where a package was built when it was still stored", async () => {
    const { id } = await buildGolden(people, lot);
    const content = Buffer.from("as it was built\n");
    await restore(id, { content, byteCount: null, crc32: null, sha256: sha256(content).digest() });
    const { status, body } = await bundleOf(id);
    expect(status).toBe(200);
    expect(Buffer.from(readZip(body).get("images.jsonl") ?? "")).toEqual(content);
  });

  it("is handed out only if it comes out as it was built", async () => {
    const { id } = await buildGolden(people, lot);
    await restore(id, { sha256: randomBytes(32) });
    const { status, body } = await bundleOf(id);
    expect(status).toBe(500);
    expect(body).toMatchObject({ code: "package.bytes_differ", path: "images.jsonl" });
    expect(await countBundles(id)).toBe(0);
  });
});

describe("POST /packages/{id}/rebuild", () => {
  const rebuildOf = async (id: string) => (await api.call("GET", `/packages/${id}`, { as: "engineer" })).body.rebuild;

  it("composes the package again and finds the same bytes", async () => {
    const asked = await api.call("POST", `/packages/${first.id}/rebuild`, { as: "reviewer" });
    expect(asked).toMatchObject({ status: 202, body: { id: first.id, rebuild: null } });
    expect(await rebuildOf(first.id)).toBeNull();
    await api.runJobs();
    expect(await rebuildOf(first.id)).toMatchObject({ same: true });
    const event = await api.db
      .selectFrom("ledgerEvent")
      .select("action")
      .where("subject", "=", first.id)
      .orderBy("seq", "desc")
      .limit(1)
      .executeTakeFirstOrThrow();
    expect(event.action).toBe("package.rebuilt");
  });

  it("tells what differs where an input is no longer what it was", async () => {
    const image = await api.owner
      .selectFrom("image")
      .select(["coefficientSetId", "serial"])
      .where("packageId", "=", first.id)
      .orderBy("serial")
      .limit(1)
      .executeTakeFirstOrThrow();
    await api.owner.transaction().execute(async (trx) => {
      await trx.executeQuery(rawSql("alter table coefficient_set disable trigger user"));
      await trx
        .updateTable("coefficientSet")
        .set((eb) => ({ gain: eb("gain", "*", 1.001) }))
        .where("id", "=", image.coefficientSetId)
        .execute();
      await trx.executeQuery(rawSql("alter table coefficient_set enable trigger user"));
    });
    await api.call("POST", `/packages/${first.id}/rebuild`, { as: "engineer" });
    await api.runJobs();
    const { digest } = (await api.call("GET", `/packages/${first.id}`, { as: "engineer" })).body;
    const rebuild = await rebuildOf(first.id);
    expect(rebuild).toMatchObject({ same: false, differs: { built: digest, images: 1, serials: [image.serial] } });
    expect(rebuild.differs.files.sort()).toEqual(["SHA256SUMS", "images.jsonl", "manifest.json"]);
    expect(rebuild.differs.repeated).not.toBe(digest);
  });

  it("is for engineers and reviewers, and for packages that were built", async () => {
    expect((await api.call("POST", `/packages/${first.id}/rebuild`)).status).toBe(401);
    for (const as of ["auditor", "service", "operator", "admin"] as const) {
      expect((await api.call("POST", `/packages/${first.id}/rebuild`, { as })).status).toBe(403);
    }
    const missing = await api.call("POST", `/packages/${uuidv7()}/rebuild`, { as: "engineer" });
    expect(missing).toMatchObject({ status: 404, body: { code: "package.not_found" } });
    const started = await api.call("POST", `/lots/${lot.lot}/packages`, {
      as: "engineer",
      body: { layout: lot.layoutVersion },
    });
    const building = await api.call("POST", `/packages/${started.body.id}/rebuild`, { as: "engineer" });
    expect(building).toMatchObject({ status: 409, body: { code: "package.not_built" } });
    expect(await bundleOf(started.body.id)).toMatchObject({ status: 409, body: { code: "package.not_built" } });
    const manifest = await api.call("GET", `/packages/${started.body.id}/manifest`, { as: "engineer" });
    expect(manifest).toMatchObject({ status: 409, body: { code: "package.not_built" } });
  });
});
