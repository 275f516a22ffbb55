import { expect, it } from "vitest";
import { poolGain } from "@/lib/domain/compensation/pooled";
import { readFamily } from "@/tests/unit/compensation/golden-example";

/** Common practice, no source: a lot's coefficient is the plain average over its sample. */
it("averages 0.95, 0.96 and 0.94 to 0.95", () => {
  const trims = [0.95, 0.96, 0.94].map((value) => ({ gain: value, gainTc: value * 1e-3 }));
  const pooled = poolGain(trims, 1, readFamily("family.json"));
  expect(pooled?.meanGain).toBeCloseTo(0.95, 15);
  expect(pooled?.gainTc).toBeCloseTo(0.95e-3, 18);
});
