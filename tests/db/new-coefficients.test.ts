import { sql } from "kysely";
import { v7 as uuidv7 } from "uuid";
import { beforeAll, describe, expect, it } from "vitest";
import { listSetValues } from "@/db/queries/coefficients";
import { insertDerivation } from "@/db/queries/derivations";
import { findDeviceIds } from "@/db/queries/devices";
import { insertSets, type NewSet } from "@/db/queries/new-coefficients";
import type { Coefficients } from "@/lib/domain/compensation/types";
import { numberSerials } from "@/lib/domain/serials";
import { addDevices } from "@/lib/services/lots/add-devices";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD } from "../support/people";
import { arrangeFamilyLot } from "../support/scenario/family-lot";

/** More than a statement takes, and more than a page gives. */
const COUNT = 2_345;
const serials = numberSerials({ prefix: "SET-", from: 1, count: COUNT, digits: 5 });

let api: TestApi;
let lot: { id: string; familyRevisionId: string };
let deviceIds: Map<string, string>;

beforeAll(async () => {
  api = await openTestApi();
  const people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  const { lot: code } = await arrangeFamilyLot(people);
  await addDevices(people.engineer, { lot: code, serials });
  const found = api.db.selectFrom("lot").select(["id", "familyRevisionId"]).where("code", "=", code);
  lot = await found.executeTakeFirstOrThrow();
  deviceIds = await findDeviceIds(api.db, lot.id, serials);
});

async function store(sets: readonly Omit<NewSet, "id">[]): Promise<string> {
  const [id, at] = [uuidv7(), new Date()];
  const rest = { method: "individual", order: 2, engine: "1", runIds: [], exclusions: [], progressTotal: 1 } as const;
  const by = { sha256: Buffer.alloc(32, 1), createdAt: at, createdBy: api.people.engineer.id };
  await api.db.transaction().execute(async (trx) => {
    await insertDerivation(trx, { id, lotId: lot.id, familyRevisionId: lot.familyRevisionId, ...rest, ...by });
    await insertSets(
      trx,
      id,
      sets.map((set) => ({ ...set, id: uuidv7() })),
      at,
    );
  });
  return id;
}

/** Doubles of all sizes, whose decimal text needs up to 17 digits. */
const coefficientsOf = (i: number): Coefficients => ({
  tempOffset: -230 - i / 7,
  tempSlope: 0.1 + 1 / (i + 3),
  zero: (i % 2 === 0 ? 1 : -1) * 5e-324 * i,
  zeroTc: Math.PI * 1e-6 * (i - 1_000),
  gain: 1 + Number.EPSILON * i,
  gainTc: -4.1e-4 / (i + 1),
  ...(i % 3 === 0 && { zeroTc2: 1e-9 * i, gainTc2: 1.7976931348623157e308 }),
});

describe("sets of a derivation", () => {
  it("come back bit by bit, by serial, whatever statements and pages they were cut into", async () => {
    const sets = serials.map((serial, i) => ({
      deviceId: deviceIds.get(serial) as string,
      role: i % 2 === 0 ? ("sample" as const) : ("zero" as const),
      coefficients: coefficientsOf(i),
      detail: { points: [i / 3], text: `ä "${i}" \\ {}` },
    }));
    const id = await store(sets.toReversed());
    const expected = sets.map(({ role, coefficients }, i) => ({
      serial: serials[i],
      role,
      state: "proposed",
      coefficients,
    }));
    expect(await listSetValues(api.db, id)).toEqual(expected);
    const details = api.db
      .selectFrom("coefficientSet")
      .innerJoin("device", "device.id", "coefficientSet.deviceId")
      .select("detail")
      .where("derivationId", "=", id)
      .orderBy("device.serial");
    expect((await details.execute()).map(({ detail }) => detail)).toEqual(sets.map(({ detail }) => detail));
  });

  it("have no state where they have no values, and no zero with a sign", async () => {
    const [first, second] = serials.map((serial) => deviceIds.get(serial) as string) as [string, string];
    const zero = { ...coefficientsOf(1), zero: -0 };
    const id = await store([
      { deviceId: first, role: "excluded", coefficients: null, detail: {} },
      { deviceId: second, role: "zero", coefficients: zero, detail: {} },
    ]);
    const [without, withZero] = await listSetValues(api.db, id);
    expect(without).toEqual({ serial: serials[0], role: "excluded", state: null, coefficients: null });
    expect(withZero?.coefficients).toEqual({ ...zero, zero: 0 });
    const { rows } =
      await sql`select zero::text from coefficient_set where derivation_id = ${id} order by zero`.execute(api.db);
    expect(rows).toEqual([{ zero: "0" }, { zero: null }]);
  });
});
