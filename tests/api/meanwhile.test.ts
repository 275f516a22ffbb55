/** What others do to a lot's devices while a long file is read, judged and stored in slices. */
import { beforeAll, beforeEach, describe, expect, it } from "vitest";
import { numberSerials } from "@/lib/domain/serials";
import { toAppError } from "@/lib/http/problem";
import { importCoefficients } from "@/lib/services/coefficients/import-coefficients";
import type { PersonCtx } from "@/lib/services/context";
import { addDevices } from "@/lib/services/lots/add-devices";
import { addLot } from "@/lib/services/lots/add-lot";
import { uploadRun } from "@/lib/services/runs/upload-run";
import { openTestApi, type TestApi } from "../support/api";
import { withMeanwhile } from "../support/meanwhile";
import { PASSWORD } from "../support/people";
import { arrangeFamilyLot } from "../support/scenario/family-lot";

/** More than a statement takes. */
const MANY = 2_500;
/** Of the look-up of a lot's devices by serial, and of the one of any lot's. */
const [OF_LOT, OF_ANY_LOT] = ["string_agg", "device.serial = any("];

let api: TestApi;
let lot: string;
let count = 0;

beforeAll(async () => {
  api = await openTestApi();
  const people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  const { family } = await arrangeFamilyLot(people);
  for (let number = 1; number <= 12; number++)
    await addLot(people.engineer, { code: `M-${number}`, family: family.code, firmware: "2.3.0" });
});
beforeEach(() => {
  lot = nextLot();
});

const nextLot = () => `M-${++count}`;
const serialsOf = (code: string, many = 3) => numberSerials({ prefix: `${code}-`, from: 1, count: many, digits: 5 });
const another = (code: string, serials: readonly string[]) => addDevices(api.ctx("engineer2"), { lot: code, serials });
const devicesOf = async (code: string) => {
  const found = api.db.selectFrom("device").innerJoin("lot", "lot.id", "device.lotId").where("lot.code", "=", code);
  return (await found.select("device.serial").orderBy("device.serial").execute()).map(({ serial }) => serial);
};
const codeOf = (work: Promise<unknown>) =>
  work.then(
    () => "done",
    (thrown) => toAppError(thrown).code,
  );

/** Somebody else does something in the pause after the first statement with these words. */
const paused = (words: string, work: () => Promise<unknown>): PersonCtx => ({
  ...api.ctx("engineer"),
  db: withMeanwhile(api.db, words, work),
});

describe("a run that brings devices along", () => {
  const HEADER = "serial,point,chamber_c,soak_min,device_temp,load_kg,signal_mv_v,taken_at";
  const upload = (ctx: PersonCtx) => {
    const rows = serialsOf(lot).map((serial) => `${serial},1,10.5,98,1941.32,0,-0.0139659,2026-03-02T09:48:00Z`);
    const bytes = Buffer.from([HEADER, ...rows].join("\n"));
    return uploadRun(ctx, { lot, purpose: "zero", equipment: [], addDevices: true, bytes });
  };

  it.each([
    ["between the two look-ups", OF_LOT],
    ["after both look-ups", OF_ANY_LOT],
  ])("takes one as known that was added to the lot %s", async (_, words) => {
    const [, second] = serialsOf(lot);
    const run = await upload(paused(words, () => another(lot, [second as string])));
    expect(run).toMatchObject({ added: 2, devices: 3, rows: 3 });
    expect(await devicesOf(lot)).toEqual(serialsOf(lot));
  });

  it("is refused whole where one was added to another lot after the look-ups", async () => {
    const [other, [, second]] = [nextLot(), serialsOf(lot)];
    const ctx = paused(OF_ANY_LOT, () => another(other, [second as string]));
    expect(await codeOf(upload(ctx))).toBe("device.in_other_lot");
    expect(await devicesOf(lot)).toEqual([]);
    const runs = api.db.selectFrom("run").innerJoin("lot", "lot.id", "run.lotId").where("lot.code", "=", lot);
    expect(await runs.select("run.id").execute()).toEqual([]);
  });
});

describe("a file of coefficients", () => {
  const HEADER = "serial,tempOffset,tempSlope,zero,zeroTc,gain,gainTc";
  const take = (ctx: PersonCtx) => {
    const rows = serialsOf(lot, MANY).map((serial) => `${serial},-231.9,0.1246,-0.0139,6.9e-06,0.996,-0.00041`);
    const bytes = Buffer.from([HEADER, ...rows].join("\n"));
    return importCoefficients(ctx, { lot, referenceC: 20, capacityKg: 20, bytes });
  };
  const stored = async () => (await api.db.selectFrom("coefficientSet").select("id").execute()).length;

  it("takes a device that was added before its slice was looked up, and names one that came too late", async () => {
    const [first, ...others] = serialsOf(lot, MANY);
    const last = others.pop() as string;
    await another(lot, others);
    const before = await stored();
    const late = take(paused(OF_LOT, () => another(lot, [first as string, last])));
    await expect(late).rejects.toMatchObject({
      code: "coefficients.invalid",
      details: { errorCount: 1, errors: [{ row: 2, column: "serial", code: "device.unknown" }] },
    });
    expect(await stored()).toBe(before);
    expect((await take(api.ctx("engineer"))).counts.devices).toBe(MANY);
  });

  it("is taken though a device is told its batch meanwhile, which stays", async () => {
    const [first] = serialsOf(lot, MANY);
    await another(lot, serialsOf(lot, MANY));
    const devices = [{ serial: first as string, gaugeBatch: "G-1" }];
    const ctx = paused(OF_LOT, () => addDevices(api.ctx("engineer2"), { lot, devices }));
    expect((await take(ctx)).counts.devices).toBe(MANY);
    const device = api.db
      .selectFrom("device")
      .select("gaugeBatch")
      .where("serial", "=", first as string);
    expect(await device.executeTakeFirst()).toEqual({ gaugeBatch: "G-1" });
  });
});

describe("a long list of devices", () => {
  it("is refused whole where its last one is added to another lot after it was looked up", async () => {
    const [other, list] = [nextLot(), serialsOf(lot, MANY)];
    const ctx = paused("count(*)::int", () => another(other, [list.at(-1) as string]));
    expect(await codeOf(addDevices(ctx, { lot, serials: list }))).toBe("device.in_other_lot");
    expect([await devicesOf(lot), await devicesOf(other)]).toEqual([[], [list.at(-1)]]);
  });

  it("tells batches once where two tell different ones at the same time", async () => {
    const list = serialsOf(lot, MANY);
    await another(lot, list);
    const tell = (name: "engineer" | "engineer2", gaugeBatch: string) =>
      codeOf(addDevices(api.ctx(name), { lot, devices: list.map((serial) => ({ serial, gaugeBatch })) }));
    const results = await Promise.all([tell("engineer", "G-1"), tell("engineer2", "G-2")]);
    expect(results.toSorted()).toEqual(["device.batch_differs", "done"]);
    const told = await api.db
      .selectFrom("device")
      .select("gaugeBatch")
      .distinct()
      .where("serial", "like", `${lot}-%`)
      .execute();
    expect(told).toHaveLength(1);
  });
});
