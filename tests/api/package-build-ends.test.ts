import { sql } from "kysely";
import { beforeAll, describe, expect, it } from "vitest";
import { getLotThread } from "@/lib/services/lots/get-lot-thread";
import { buildPackage } from "@/lib/services/packages/build-package";
import { endGivenUp } from "@/lib/services/tidy/end-given-up";
import { openTestApi, type TestApi } from "../support/api";
import { losingDatabase } from "../support/failing-database";
import { systemContext } from "../support/jobs";
import { PASSWORD } from "../support/people";
import { arrangeDerived, type DerivedLot } from "../support/scenario/derived";
import type { ScenarioPeople } from "../support/scenario/family-lot";
import { buildGolden } from "../support/scenario/packaged";

let api: TestApi;
let people: ScenarioPeople;
let lot: DerivedLot;

beforeAll(async () => {
  api = await openTestApi();
  people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  lot = await arrangeDerived(people);
});

const get = async (id: string) => (await api.call("GET", `/packages/${id}`, { as: "engineer" })).body;
const cancel = (id: string, as: "engineer" | "engineer2" | "reviewer" = "engineer") =>
  api.call("POST", `/packages/${id}/cancel`, { as });
const actionsOf = async (id: string) =>
  (await api.db.selectFrom("ledgerEvent").select("action").where("subject", "=", id).orderBy("seq").execute()).map(
    (event) => event.action,
  );

/** A package that is numbered and waits for the worker. */
async function asked(): Promise<string> {
  const { body } = await api.call("POST", `/lots/${lot.lot}/packages`, { as: "engineer", body: { layout: "1.0.0" } });
  return body.id;
}

/** Everything that a build leaves behind. */
async function traces(id: string) {
  const of = async (table: "image" | "packageFile" | "packageCheck" | "packageDerivation") =>
    (await api.db.selectFrom(table).select("packageId").where("packageId", "=", id).execute()).length;
  return [await of("image"), await of("packageFile"), await of("packageCheck"), await of("packageDerivation")];
}

describe("a build that is cancelled", () => {
  it("while it waits ends as failed, leaves nothing, and its number is passed over", async () => {
    const id = await asked();
    const { version } = await get(id);
    expect(await cancel(id, "engineer2")).toMatchObject({
      status: 200,
      body: { state: "failed", digest: null, failure: { code: "package.cancelled" } },
    });
    await api.runJobs();
    expect(await get(id)).toMatchObject({ state: "failed", failure: { code: "package.cancelled" } });
    expect(await traces(id)).toEqual([0, 0, 0, 0]);
    expect(await actionsOf(id)).toEqual(["package.build-started", "package.build-cancelled"]);
    expect((await getLotThread(people.engineer, lot.lot)).package.blocked).toBe("the build was cancelled");
    const next = await buildGolden(people, lot);
    expect(next.version).not.toBe(version);
    await cancel(await asked());
    expect((await getLotThread(people.engineer, lot.lot)).newestPackageId).toBe(next.id);
  });

  it("while it is composed stops at its next part", async () => {
    const id = await asked();
    let cancelled = false;
    const cancelling = api.db.withPlugin({
      transformQuery: ({ node }) => node,
      transformResult: async ({ result }) => {
        if (!cancelled && (await get(id)).progress.step === "composing again") {
          cancelled = true;
          await cancel(id);
        }
        return result;
      },
    });
    await buildPackage(systemContext(cancelling), { packageId: id });
    expect(cancelled).toBe(true);
    expect(await get(id)).toMatchObject({ state: "failed", failure: { code: "package.cancelled" } });
    expect(await traces(id)).toEqual([0, 0, 0, 0]);
    expect(await actionsOf(id)).toEqual(["package.build-started", "package.build-cancelled"]);
  });

  it("twice, or once it is done, is refused and changes nothing", async () => {
    const id = await asked();
    expect((await cancel(id)).status).toBe(200);
    expect(await cancel(id)).toMatchObject({ status: 409, body: { code: "package.wrong_state", state: "failed" } });
    const built = await buildGolden(people, lot);
    const before = await get(built.id);
    expect((await cancel(built.id)).status).toBe(409);
    expect(await get(built.id)).toEqual(before);
  });

  it("is an engineer's and names a package", async () => {
    const id = await asked();
    expect((await cancel(id, "reviewer")).status).toBe(403);
    expect((await api.call("POST", `/packages/${id}/cancel`)).status).toBe(401);
    expect((await cancel("0199aaaa-0000-7000-8000-000000000000")).status).toBe(404);
    expect((await api.call("POST", "/packages/nothing/cancel", { as: "engineer" })).status).toBe(422);
    expect((await get(id)).state).toBe("building");
    await api.runJobs();
    expect((await get(id)).state).toBe("draft");
  });
});

describe("a build that falls", () => {
  it("at any query shows nothing half-built, and gives the same bytes when taken up again", async () => {
    const whole = await buildGolden(people, lot, { step: "major" });
    const [hexes, { digest }] = [await contentOf(whole.id), await get(whole.id)];
    const id = await asked();
    const lostAt: number[] = [];
    for (let after = 0; ; after++) {
      const losing = losingDatabase(api.db, after);
      const ended = await buildPackage(systemContext(losing), { packageId: id }).then(
        () => true,
        (error) => error.code === "57P01" && false,
      );
      if (ended) break;
      lostAt.push(after);
      expect(await traces(id)).toEqual([0, 0, 0, 0]);
      expect(await get(id)).toMatchObject({ state: "building", digest: null, checks: [], failure: null });
      expect((await api.call("GET", `/packages/${id}/bundle`, { as: "engineer" })).status).toBe(409);
    }
    expect(lostAt.length).toBeGreaterThan(30);
    const body = await get(id);
    expect(body).toMatchObject({ state: "draft", failure: null });
    expect(body.digest).not.toBe(digest); // another version number
    const again = await contentOf(id);
    expect([...again.keys()]).toEqual([...hexes.keys()]);
    expect((await actionsOf(id)).filter((action) => action === "package.built")).toHaveLength(1);
    // The same inputs under the same number, composed once more without any fall.
    await api.call("POST", `/packages/${id}/rebuild`, { as: "engineer" });
    await api.runJobs();
    expect((await get(id)).rebuild).toMatchObject({ same: true });
  });
});

describe("a build that the queue gave up", () => {
  const giveUp = (id: string) =>
    sql`update pgboss.job set state = 'failed' where name = 'build-package' and data ->> 'packageId' = ${id}`.execute(
      api.db,
    );

  it("ends as failed, once, and only when no try is left", async () => {
    const [waiting, lost] = [await asked(), await asked()];
    await giveUp(lost);
    const ctx = systemContext(api.db);
    expect((await Promise.all([endGivenUp(ctx), endGivenUp(ctx)])).sort()).not.toEqual([0, 0]);
    expect(await endGivenUp(ctx)).toBe(0);
    expect(await get(lost)).toMatchObject({ state: "failed", digest: null, failure: { code: "job.given_up" } });
    expect(await actionsOf(lost)).toEqual(["package.build-started", "package.build-failed"]);
    expect((await get(waiting)).state).toBe("building");
    await api.runJobs();
    expect((await get(waiting)).state).toBe("draft");
  });

  it("is as true of a derivation", async () => {
    const { body } = await api.call("POST", `/lots/${lot.lot}/derivations`, {
      as: "engineer",
      body: { method: "pooled-gain", order: 1, runs: Object.values(lot.runs) },
    });
    await sql`delete from pgboss.job where name = 'derive' and data ->> 'derivationId' = ${body.id}`.execute(api.db);
    expect(await endGivenUp(systemContext(api.db))).toBe(1);
    const { state, failure } = (await api.call("GET", `/derivations/${body.id}`, { as: "engineer" })).body;
    expect({ state, failure }).toMatchObject({ state: "failed", failure: { code: "job.given_up" } });
    expect(await actionsOf(body.id)).toEqual(["derivation.started", "derivation.failed"]);
  });
});

async function contentOf(id: string): Promise<Map<string, Buffer>> {
  const rows = await api.db
    .selectFrom("image")
    .select(["serial", "sha256"])
    .where("packageId", "=", id)
    .orderBy("serial")
    .execute();
  return new Map(rows.map((row) => [row.serial, row.sha256]));
}
