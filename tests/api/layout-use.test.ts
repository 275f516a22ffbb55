import { beforeAll, expect, it } from "vitest";
import { openTestApi, type TestApi } from "../support/api";
import { PASSWORD } from "../support/people";
import { arrangeDerived, type DerivedLot } from "../support/scenario/derived";
import type { ScenarioPeople } from "../support/scenario/family-lot";
import { arrangeReleased, buildGolden } from "../support/scenario/packaged";

let api: TestApi;
let people: ScenarioPeople;
let derived: DerivedLot;

beforeAll(async () => {
  api = await openTestApi();
  people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  derived = await arrangeDerived(people);
});

it("names the lots with packages from a layout, what is live and what is under way", async () => {
  const live = await arrangeReleased(people, derived);
  await buildGolden(people, derived);
  const { status, body } = await api.call("GET", `/families/MW-20/layouts/${derived.layoutVersion}/use`, {
    as: "auditor",
  });
  expect(status).toBe(200);
  expect(body).toEqual({
    items: [
      { lot: derived.lot, firmware: "2.3.0", packages: 2, underWay: 1, live: { id: live.id, version: live.version } },
    ],
    next: null,
  });
});
