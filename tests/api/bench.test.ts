/** What the bench tells a person about a scanned serial. */
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { AppError } from "@/lib/errors";
import { recordDeviceEvent } from "@/lib/services/devices/record-device-event";
import { addDevices } from "@/lib/services/lots/add-devices";
import { addLot } from "@/lib/services/lots/add-lot";
import { withdrawPackage } from "@/lib/services/packages/release-package";
import { askBench, getBenchLot, listBenchLots } from "@/lib/services/stations/get-bench";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD } from "../support/people";
import { arrangeDerived, type DerivedLot } from "../support/scenario/derived";
import type { ScenarioPeople } from "../support/scenario/family-lot";
import { arrangeReleased, buildGolden } from "../support/scenario/packaged";
import { arrangeStation, imageDigests, reportOf, sendWrites } from "../support/scenario/station";

let api: TestApi;
let people: ScenarioPeople;
let derived: DerivedLot;
let live: string;

const LOT = "MW20-2609";
const serial = (n: number) => `${LOT}-${String(n).padStart(5, "0")}`;

beforeAll(async () => {
  api = await openTestApi();
  people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  derived = await arrangeDerived(people);
  live = (await arrangeReleased(people, derived)).id;
  await addLot(people.engineer, { code: "OTHER-1", family: "MW-20", firmware: "2.3.0" });
  await addDevices(people.engineer, { lot: "OTHER-1", serials: ["OTHER-1-1"] });
}, 60_000);
afterAll(() => api.close());

const ask = async (of: string, chosen = live) =>
  askBench(api.ctx("operator"), { lot: await getBenchLot(api.ctx("operator"), LOT), chosen, serial: of });

describe("the lots of the bench", () => {
  it("are those that ever had a release, with what is live now and no draft", async () => {
    await buildGolden(people, derived);
    expect(await listBenchLots(api.ctx("operator"))).toEqual([
      {
        lot: LOT,
        family: "MW-20",
        sequence: 1,
        held: 0,
        live: { package: live, version: "1.0.0", digest: expect.stringMatching(/^[0-9a-f]{64}$/), devices: 28 },
      },
    ]);
  });

  it("leave out a lot without any release", async () => {
    await expect(getBenchLot(api.ctx("operator"), "other-1")).rejects.toMatchObject({ code: "lot.not_found" });
    await expect(getBenchLot(api.ctx("operator"), "NONE")).rejects.toBeInstanceOf(AppError);
  });
});

describe("a scanned serial", () => {
  it("never written: write the live image, whose digest is named", async () => {
    const digest = (await imageDigests(api, live)).get(serial(1));
    expect(await ask(serial(1))).toMatchObject({ verdict: "write", imageSha256: digest, carries: null });
  });

  it("written and verified: it carries the image already", async () => {
    const station = await arrangeStation(api, "Line 1");
    await sendWrites(api, station, [await reportOf(api, { package: live, serial: serial(2) })]);
    expect(await ask(serial(2))).toMatchObject({
      verdict: "carries-already",
      carries: { version: "1.0.0", known: true, live: true, station: "Line 1" },
    });
    await sendWrites(api, station, [
      await reportOf(api, { package: live, serial: serial(2) }, { readbackSha256: "0".repeat(64) }),
    ]);
    expect(await ask(serial(2))).toMatchObject({ verdict: "write", carries: { known: false, live: false } });
  });

  it("held or scrapped: do not write, and no digest is given", async () => {
    const event = { reason: "Dropped", password: PASSWORD };
    await recordDeviceEvent(people.engineer, { serial: serial(3), event: { kind: "hold", ...event } });
    await recordDeviceEvent(people.engineer, { serial: serial(4), event: { kind: "scrap", ...event } });
    expect(await ask(serial(3))).toMatchObject({ verdict: "held", imageSha256: null });
    expect(await ask(serial(4))).toMatchObject({ verdict: "scrapped", imageSha256: null });
  });

  it("in no package, of another lot, or unknown", async () => {
    await addDevices(people.engineer, { lot: LOT, serials: [serial(900)] });
    expect(await ask(serial(900))).toMatchObject({ verdict: "not-in-package", imageSha256: null });
    expect(await ask("OTHER-1-1")).toMatchObject({ verdict: "other-lot", lot: "OTHER-1", imageSha256: null });
    expect(await ask("NOBODY")).toMatchObject({ verdict: "unknown-serial", carries: null });
  });

  it("while another package than the chosen one is live: stop", async () => {
    expect(await ask(serial(1), "0198a0c0-0000-7000-8000-000000000000")).toMatchObject({
      verdict: "live-changed",
      imageSha256: null,
    });
  });

  it("after a withdrawal: nothing may be written", async () => {
    await withdrawPackage(people.engineer, { id: live, reason: "Wrong sensor", password: PASSWORD });
    expect(await ask(serial(1))).toMatchObject({ verdict: "nothing-live", imageSha256: null });
    expect((await getBenchLot(api.ctx("operator"), LOT)).live).toBeNull();
  });
});
