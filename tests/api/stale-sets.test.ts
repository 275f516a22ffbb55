import { expect, it } from "vitest";
import { countStaleSets } from "@/lib/services/runs/count-stale-sets";
import { getRunView } from "@/lib/services/runs/get-run";
import { uploadRun } from "@/lib/services/runs/upload-run";
import { openTestApi } from "../support/api";
import { PASSWORD } from "../support/people";
import { arrangeDerived } from "../support/scenario/derived";

it("counts what a replaced run made stale, by derivation, and nothing while it counts", async () => {
  const api = await openTestApi();
  const people = { engineer: api.ctx("engineer"), reviewer: api.ctx("reviewer"), password: PASSWORD };
  const lot = await arrangeDerived(people);
  const auditor = api.ctx("auditor");
  expect((await countStaleSets(auditor, lot.runs.sample)).size).toBe(0);
  const bytes = Buffer.concat([lot.read("readings-sample.csv"), Buffer.from("\n")]);
  const given = { lot: lot.lot, purpose: "sample", equipment: [], addDevices: false } as const;
  const late = await uploadRun(people.engineer, {
    ...given,
    bytes,
    supersedes: lot.runs.sample,
    reason: "certificate's correction was left out",
  });
  expect([...(await countStaleSets(auditor, lot.runs.sample))]).toEqual([[lot.derivation, late.staleSets]]);
  expect(late.staleSets).toBe(28);
  expect((await getRunView(auditor, lot.runs.sample)).supersededBy).toBe(late.id);
  expect((await countStaleSets(auditor, late.id)).size).toBe(0);
});
