import { beforeAll, expect, it } from "vitest";
import { addDevices } from "@/lib/services/lots/add-devices";
import { addLot } from "@/lib/services/lots/add-lot";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD } from "../support/people";
import { approveDerivation, deriveGolden, type ReadLot, uploadGoldenRuns } from "../support/scenario/derived";
import { publishFamily, publishLayout, type ScenarioPeople } from "../support/scenario/family-lot";
import { firstGolden } from "../support/scenario/golden";
import { arrangeReleased, buildGolden } from "../support/scenario/packaged";

let api: TestApi;
let people: ScenarioPeople;
let read: ReadLot;

const golden = firstGolden();
/** Stricter than the defaults, so that the golden lot itself stands out. */
const checks = { outlierScore: 3, differenceShareWarn: 0.5, differenceStepWarn: 1e-9 };

beforeAll(async () => {
  api = await openTestApi();
  people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  await publishFamily(people, { ...golden.family, checks });
  await publishLayout(people, golden.layout);
  await addLot(people.engineer, { code: golden.lot, family: golden.family.code, firmware: golden.firmware });
  await addDevices(people.engineer, { lot: golden.lot, serials: golden.serials });
  read = await uploadGoldenRuns(people, golden);
});

const checksOf = async (id: string) => {
  const { body } = await api.call("GET", `/packages/${id}`, { as: "engineer" });
  return new Map<string, { verdict: string; message: string; evidence: Record<string, unknown> }>(
    body.checks.map((check: { code: string }) => [check.code, check]),
  );
};

it("takes the thresholds of the family revision, and compares with what is live", async () => {
  const first = await deriveGolden(people, read);
  await approveDerivation(people, first.derivation);
  const live = await arrangeReleased(people, first);
  const before = await checksOf(live.id);
  expect(before.get("outliers")?.evidence).toMatchObject({ threshold: 3, devices: 28 });
  expect(before.get("live-difference")).toMatchObject({ verdict: "pass", evidence: { live: null } });

  const [excluded] = golden.serials as [string];
  const second = await deriveGolden(people, read, [{ serial: excluded, reason: "Connector was loose" }]);
  await approveDerivation(people, second.derivation);
  const next = await buildGolden(people, second);
  const difference = (await checksOf(next.id)).get("live-difference");
  expect(difference).toMatchObject({
    verdict: "warn",
    evidence: {
      live: { id: live.id, version: live.version },
      thresholds: { differenceShareWarn: 0.5, differenceStepWarn: 1e-9, signFlipsWarn: 0 },
    },
  });
  const fields = difference?.evidence.fields as { name: string; devices: number; signFlips: { count: number } }[];
  expect(fields.map((field) => field.name)).not.toContain("packagePatch");
  expect(fields.map((field) => field.name)).not.toContain("imageCrc");
  // Another sample gives another pooled coefficient to everybody.
  expect(fields.find((field) => field.name === "gainTc")?.devices).toBeGreaterThan(20);
  expect(fields.find((field) => field.name === "gainTc")?.signFlips.count).toBe(0);
  expect(difference?.message).toContain("of the devices change.");
});

it("keeps thresholds that nobody set out of the document and its digest", async () => {
  const code = "NO-THRESHOLDS";
  const body = { ...golden.family, code };
  const { body: made } = await api.call("POST", "/families", { as: "engineer", body });
  expect(made.document).toMatchObject({ code });
  expect(Object.keys(made.document)).not.toContain("checks");
  const wrong = { ...golden.family, code: "WRONG", checks: { outlierScore: 1 } };
  expect((await api.call("POST", "/families", { as: "engineer", body: wrong })).status).toBe(422);
  const unknown = { ...golden.family, code: "WRONG", checks: { other: 1 } };
  expect((await api.call("POST", "/families", { as: "engineer", body: unknown })).status).toBe(422);
});
